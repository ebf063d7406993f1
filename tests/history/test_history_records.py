"""Every value that a record ever had, and the texts in the history that cannot be read."""

from __future__ import annotations

import base64
import json
import os
from pathlib import Path

import pytest
from history.repositories import ID, Repository, result, with_looks

from gatecheck import git
from gatecheck.history import records
from gatecheck.history.records import (
    Recorded,
    record_versions,
    versions_with_aliases,
)
from gatecheck.history.walk import history_of

ALL = ("**",)


def recorded(repo: Repository, *ids: str) -> Recorded:
    """Return the versions of those records, or of all."""
    return record_versions(repo.root, history_of(repo.root), frozenset(ids) or None)


def states(found: Recorded, record_id: str = ID) -> list[tuple[int, str, str]]:
    """Return the index, the place and the p of each version."""
    told = [(each, each.record.test) for each in found.by_id.get(record_id, ())]
    return [(each.index, str(each.place), test.p.shown) for each, test in told if test and test.p]


def test_each_commit_that_changes_a_record_gives_a_version(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")
    repo.commit(r=None)

    found = recorded(repo, ID)

    assert states(found) == [(0, "r.json:1", "0.42"), (1, "r.json:1", "0.21"), (2, "r.json:1", "0.11"),
                             (3, "r.json:1", "0.06"), (4, "r.json:1", "0.031")]  # fmt: skip
    assert (found.gaps, found.missing) == ((), 0)
    first = found.by_id[ID][0]
    assert first.commit is not None
    assert (first.commit.day, len(first.digest)) == ("2031-01-02", 64)


def test_a_text_that_stands_twice_is_read_once_and_counts_in_both_places(
    repo: Repository, monkeypatch: pytest.MonkeyPatch
) -> None:
    repo.commit(a=result(0.2, 20))
    repo.commit(b=result(0.2, 20))
    repo.commit(a=result(0.1, 40))
    repo.commit(a=result(0.2, 20))
    asked: list[str] = []
    read = git.read_blobs

    def counting(folder: Path, ids: list[str], most: int) -> object:
        asked.extend(ids)
        return read(folder, ids, most)

    monkeypatch.setattr(git, "read_blobs", counting)
    found = record_versions(repo.root, history_of(repo.root), frozenset([ID]))

    assert [(index, place) for index, place, _ in states(found)] == [
        (0, "a.json:1"), (1, "b.json:1"), (2, "a.json:1"), (3, "a.json:1"),
    ]  # fmt: skip
    assert len(set(asked)) == 3  # two texts, and the first commit


def test_only_files_that_the_globs_name_are_read(repo: Repository) -> None:
    repo.put("kept/a.json", result(0.2, 20))
    repo.put("kept/scratch/b.json", result(0.1, 40))
    repo.put("other/c.json", result(0.3, 10))
    repo.put("kept/a.txt", result(0.4, 10))
    repo.commit()

    found = record_versions(repo.root, history_of(repo.root), None, ("kept/**",), ("**/scratch/**",))

    assert states(found) == [(0, "kept/a.json:1", "0.2")]


@pytest.mark.parametrize(
    ("path", "text"),
    [
        ("a.json", json.dumps(result(0.2, 20)).replace("drainage/e", "drainage\\/e")),
        ("a.json", json.dumps(result(0.2, 20)).replace('"drainage/', '"\\u0064rainage/')),
        ("a.yaml", json.dumps(result(0.2, 20)).replace('"drainage/', '"\\x64rainage/')),
        ("a.yml", json.dumps(result(0.2, 20)).replace('"drainage/earth', '"drainage/\\\n  earth')),
        ("a.jsonl", json.dumps(result(0.5, 10, id="b")) + "\n" + json.dumps(result(0.2, 20)) + "\n"),
        ("a.JSON", json.dumps([result(0.5, 10, id="b"), result(0.2, 20)])),
    ],
)
def test_an_id_is_found_however_it_is_written(repo: Repository, path: str, text: str) -> None:
    repo.put(path, text)
    repo.commit()

    assert [p for _, _, p in states(recorded(repo, ID))] == ["0.2"]
    assert set(recorded(repo, ID).by_id) == {ID}


def test_an_id_in_base64_among_the_outputs_of_a_notebook_is_found(repo: Repository) -> None:
    data = {
        "application/vnd.gatecheck.record+json": base64.b64encode(json.dumps(result(0.2, 20)).encode()).decode()
    }
    output = {"output_type": "display_data", "data": data, "metadata": {}}
    repo.put("n.ipynb", {"nbformat": 4, "nbformat_minor": 5, "metadata": {}, "cells": [{"outputs": [output]}]})
    repo.commit()

    assert [p for _, _, p in states(recorded(repo, ID))] == ["0.2"]


def test_a_name_that_is_no_utf8_is_told_as_escapes(repo: Repository) -> None:
    repo.put(os.fsdecode(b"caf\xe9.json"), result(0.2, 20))
    repo.commit()

    assert [place for _, place, _ in states(recorded(repo))] == ["caf\\xe9.json:1"]


def test_many_ids_are_found_as_few_are(repo: Repository) -> None:
    repo.commit(a=result(0.2, 20), b=result(0.5, 10, id="another"))

    assert set(recorded(repo, ID, *(f"none/{number}" for number in range(30))).by_id) == {ID}
    assert set(recorded(repo).by_id) == {ID, "another"}


def test_what_cannot_be_read_is_told_and_hides_nothing(repo: Repository) -> None:
    broken = json.dumps(result(0.3, 10), indent=1)[:-2]
    faulty = result(0.25, 15, status="certain")
    repo.commit(a=broken)
    repo.commit(a=faulty)
    repo.commit(a=result(0.2, 20), other='{"gatecheck": 1')
    repo.put("no record.json", '{"gatecheck": "record/1", "id": "another", ')
    repo.commit()

    found = recorded(repo, ID)

    assert states(found) == [(2, "a.json:1", "0.2")]
    first, second, *_ = history_of(repo.root).commits
    assert [(gap.commit.id, gap.path) for gap in found.gaps] == [(first.id, "a.json"), (second.id, "a.json")]
    assert found.gaps[0].message.startswith("the text is no JSON")
    assert found.gaps[1].message.startswith(f"{ID}: status is ")
    assert [gap.path for gap in recorded(repo).gaps] == ["a.json", "a.json", "no record.json"]


def test_a_text_too_long_to_be_read_is_told(repo: Repository, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(records, "LONGEST_PARSED", 2000)
    repo.commit(a={**result(0.2, 20), "claim": "x" * 3000}, b=result(0.2, 20))

    found = recorded(repo, ID)

    assert [(gap.path, gap.message) for gap in found.gaps] == [("a.json", "the file is too long")]
    assert [place for _, place, _ in states(found)] == ["b.json:1"]


def test_contents_that_a_partial_clone_lacks_are_counted_and_not_fetched(repo: Repository, tmp_path: Path) -> None:
    repo.commit(a=result(0.3, 10), text="1")
    repo.commit(a=result(0.2, 20))
    partial = repo.clone(tmp_path / "partial", "--filter=blob:none")

    found = recorded(partial, ID)

    assert (states(found), found.missing) == ([(1, "a.json:1", "0.2")], 1)
    assert partial.git("rev-list", "--objects", "--all", "--missing=print").count("?") == 1
    partial.git("fetch", "-q", "--refetch", "--no-filter", "origin")
    assert recorded(partial, ID).missing == 0


def test_earlier_ids_are_followed(repo: Repository) -> None:
    repo.commit(a=result(0.4, 10, id="oldest"))
    repo.commit(a=result(0.3, 20, id="older", aliases=["oldest"]))
    repo.commit(a=result(0.2, 30, aliases=["older"]), b=result(0.9, 30, id="another"))
    history = history_of(repo.root)

    found = versions_with_aliases(repo.root, history, frozenset([ID]), ALL, ())

    assert found.lineage([ID]) == {ID, "older", "oldest"}
    assert [each.record.id for each in found.versions(found.lineage([ID]))] == ["oldest", "older", ID]
    assert "another" not in found.by_id


def test_aliases_in_a_circle_end(repo: Repository) -> None:
    repo.commit(a=result(0.4, 10, id="one", aliases=["two"]))
    repo.commit(a=result(0.3, 20, id="two", aliases=["one"]))

    found = versions_with_aliases(repo.root, history_of(repo.root), frozenset(["two"]), ALL, ())

    assert found.lineage(["two"]) == {"one", "two"}
