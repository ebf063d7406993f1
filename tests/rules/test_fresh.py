"""Rule `fresh`: results against what they were made from, on real trees and repositories."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest
from support import Document, commit_all, drainage, git

from gatecheck.columns import columns_of
from gatecheck.compare.own_numbers import own_numbers
from gatecheck.evidence import weigh_columns
from gatecheck.freshness import freshness
from gatecheck.model.verdict import Finding
from gatecheck.policies import read_own_policy
from gatecheck.rules import fresh
from gatecheck.rules.engine import judge_all
from gatecheck.rules.rule import Table
from gatecheck.scan import scan

DATA = b"plot,yield\n1,4.2\n"
OTHER = b"plot,yield\n1,4.3\n"
WANTED = "the policy wants results made from what is here"


def sha(content: bytes) -> str:
    """The SHA-256 digest."""
    return hashlib.sha256(content).hexdigest()


def made_from(*inputs: Document, **changes: Any) -> Document:
    """A record with these inputs."""
    return drainage(provenance={"inputs": list(inputs)}, **changes)


def plots(content: bytes = DATA, path: str = "data/plots_2031.csv") -> Document:
    """An input with the digest of that content."""
    return {"path": path, "sha256": sha(content)}


def write(root: Path, record: Document, **files: bytes | None) -> None:
    """Write the record, and `data/plots_2031.csv` with what `plots` says."""
    (root / "data").mkdir(exist_ok=True)
    (root / "r.json").write_text(json.dumps(record), encoding="utf-8")
    content = files.get("plots", DATA)
    if content is not None:
        (root / "data" / "plots_2031.csv").write_bytes(content)


def judged(root: Path, settings: Document | None = None, *, wordy: bool = False) -> list[Finding]:
    """What the rule says of each record of the tree."""
    tree = scan(root, ["**"], [])
    assert tree.problems == ()
    policy, faults = read_own_policy({"gatecheck": "policy/1", "rules": {"fresh": settings or {}}})
    assert policy is not None, faults
    applied = tuple(policy.for_record(one.record, one.at.path) for one in tree.found)
    columns = columns_of(tree.found)
    evidence = weigh_columns(columns, [each.evidence for each in applied])
    inputs = freshness(root, tree.found, [True] * len(tree.found))
    table = Table(columns, evidence, own_numbers(columns, evidence), applied, inputs=inputs)
    rows = judge_all([fresh.RULE], table, explain=frozenset(range(len(applied)) if wordy else ()))
    return [finding for row in rows for finding in row]


def only(findings: Sequence[Finding]) -> tuple[str, str, str]:
    """Outcome, message and remedy of the only finding."""
    (one,) = findings
    assert one.observed is None
    assert one.limit is None
    return one.outcome, one.message, one.remedy


def test_the_data_that_it_was_made_from_are_here(tmp_path: Path) -> None:
    write(tmp_path, made_from(plots()))

    assert only(judged(tmp_path)) == ("met", "", "")
    assert only(judged(tmp_path, wordy=True)) == (
        "met",
        "The inputs (data/plots_2031.csv) are as the record says.",
        "",
    )


def test_other_data_than_committed(tmp_path: Path) -> None:
    write(tmp_path, made_from(plots()), plots=OTHER)

    assert only(judged(tmp_path)) == (
        "short",
        "Result made from other data than committed: data/plots_2031.csv has the SHA-256 digest "
        f"{sha(OTHER)[:12]}…, and the record says {sha(DATA)[:12]}…; {WANTED}.",
        "Rerun the analysis, and commit the record that it writes.",
    )


def test_data_that_are_gone(tmp_path: Path) -> None:
    """Whether or not the record has their digest."""
    write(tmp_path, made_from({"path": "data/plots_2031.csv"}), plots=None)

    assert only(judged(tmp_path))[:2] == (
        "short",
        f"Result made from other data than committed: data/plots_2031.csv is not here; {WANTED}.",
    )


def test_of_many_inputs_three_are_named(tmp_path: Path) -> None:
    write(tmp_path, made_from(plots(), *(plots(path=f"{name}.csv") for name in "abcde")))

    assert only(judged(tmp_path))[1] == (
        "Result made from other data than committed: a.csv is not here; b.csv is not here; c.csv is not here and "
        f"2 more; {WANTED}."
    )


def test_one_that_differs_wins_over_one_that_is_not_known(tmp_path: Path) -> None:
    write(tmp_path, made_from({"path": "r.json"}, plots()), plots=OTHER)

    assert only(judged(tmp_path))[0] == "short"


def test_inputs_without_a_digest_are_undecided(tmp_path: Path) -> None:
    inputs = [{"path": "data/plots_2031.csv"}, plots(path="../plots.csv"), plots(path="data")]
    write(tmp_path, made_from(*inputs))

    assert only(judged(tmp_path)) == (
        "undecided",
        "Whether the inputs are those that the result was made from cannot be told: data/plots_2031.csv has no "
        "sha256 in the record; ../plots.csv lies outside of the repository; data is a folder or a device and no "
        "file.",
        "Give the sha256 of each input, and keep it in the repository.",
    )


@pytest.mark.parametrize("record", [drainage(), made_from()])
def test_a_claim_says_what_it_was_made_from(tmp_path: Path, record: Document) -> None:
    write(tmp_path, record)

    assert only(judged(tmp_path)) == (
        "undecided",
        "The record does not say what it was made from.",
        "Give provenance.inputs, each with its path and sha256; in Python, declare(..., inputs=[...]).",
    )


def test_without_a_claim_only_what_is_said_is_judged(tmp_path: Path) -> None:
    write(tmp_path, drainage(claim=...))
    nothing = judged(tmp_path)
    write(tmp_path, made_from(plots(), claim=...), plots=OTHER)

    assert nothing == []
    assert only(judged(tmp_path))[0] == "short"


def test_a_table_without_facts_passes_nothing(tmp_path: Path) -> None:
    """Unknown is not passed."""
    write(tmp_path, made_from(plots()))
    tree = scan(tmp_path, ["**"], [])
    columns = columns_of(tree.found)
    policy, _ = read_own_policy({"gatecheck": "policy/1", "rules": {"fresh": {}}})
    assert policy is not None
    applied = (policy.for_record(tree.found[0].record, "r.json"),)
    evidence = weigh_columns(columns, [applied[0].evidence])

    ((finding,),) = judge_all([fresh.RULE], Table(columns, evidence, (), applied))

    assert finding.outcome == "undecided"


def with_code(root: Path, **changes: Any) -> None:
    """A repository in which the code was committed after the record."""
    (root / "analysis.py").write_text("1", encoding="utf-8")
    provenance = {"code": "analysis.py", "inputs": [plots()]}
    write(root, drainage(provenance=provenance | changes))
    commit_all(root, "first")
    (root / "analysis.py").write_text("2", encoding="utf-8")
    commit_all(root, "second")


def test_newer_code_is_said_and_is_no_shortfall(tmp_path: Path) -> None:
    with_code(tmp_path)
    newer = " Its code, analysis.py, changed in a later commit than the record."

    met = only(judged(tmp_path, wordy=True))
    (tmp_path / "data" / "plots_2031.csv").write_bytes(OTHER)
    short = only(judged(tmp_path))

    assert met == ("met", f"The inputs (data/plots_2031.csv) are as the record says.{newer}", "")
    assert short[0] == "short"
    assert short[1].endswith(f"; {WANTED}.{newer}")
    assert short[2] == "Rerun analysis.py, and commit the record that it writes."


def test_newer_code_is_noted_without_being_asked_for(tmp_path: Path) -> None:
    with_code(tmp_path)
    later = only(judged(tmp_path))
    write(tmp_path, drainage(provenance={"code": "analysis.py", "inputs": [plots()], "made_at": "again"}))
    commit_all(tmp_path, "rerun")

    assert later == (
        "met",
        "The inputs (data/plots_2031.csv) are as the record says. Its code, analysis.py, changed in a later commit "
        "than the record.",
        "",
    )
    assert only(judged(tmp_path)) == ("met", "", "")


def test_newer_code_is_a_shortfall_where_the_policy_says_so(tmp_path: Path) -> None:
    with_code(tmp_path)

    assert only(judged(tmp_path, {"code": True})) == (
        "short",
        f"Result made by other code than committed: analysis.py changed later; {WANTED}.",
        "Rerun analysis.py, and commit the record that it writes.",
    )
    write(tmp_path, drainage(provenance={"code": "analysis.py", "inputs": [plots()], "made_at": "again"}))
    assert only(judged(tmp_path, {"code": True}))[0] == "met"


@pytest.mark.parametrize("code", ["gone.py", None])
def test_code_whose_age_is_not_known_is_undecided_where_it_counts(tmp_path: Path, code: str | None) -> None:
    with_code(tmp_path, code=code)

    assert only(judged(tmp_path))[0] == "met"
    assert only(judged(tmp_path, {"code": True})) == (
        "undecided",
        "Whether the code changed later than the record cannot be told.",
        "Give provenance.code, and judge in a clone that has the whole history.",
    )


def test_outside_of_a_repository_nothing_has_an_age(tmp_path: Path) -> None:
    write(tmp_path, drainage(provenance={"code": "analysis.py", "inputs": [plots()]}))

    assert only(judged(tmp_path))[0] == "met"
    assert only(judged(tmp_path, {"code": True}))[0] == "undecided"


def test_where_the_history_is_cut_only_what_came_since_has_an_age(tmp_path: Path) -> None:
    full, shallow = tmp_path / "full", tmp_path / "shallow"
    full.mkdir()
    with_code(full)
    git(tmp_path, "clone", "-q", "--depth=1", full.as_uri(), str(shallow))
    at_the_cut = only(judged(shallow, {"code": True}))
    commit_all(full, "third")
    (full / "analysis.py").write_text("3", encoding="utf-8")
    commit_all(full, "fourth")
    git(shallow, "fetch", "-q", "--depth=2")
    git(shallow, "reset", "-q", "--hard", "origin/main")

    assert at_the_cut[0] == "undecided"
    assert only(judged(shallow, {"code": True}))[0] == "short"


def test_in_a_folder_of_a_repository_paths_are_those_of_the_folder(tmp_path: Path) -> None:
    study = tmp_path / "study"
    study.mkdir()
    git(tmp_path, "init", "-q")
    with_code(study)
    git(tmp_path, "add", "-A")
    git(tmp_path, "commit", "-q", "-m", "one")
    (study / "analysis.py").write_text("3", encoding="utf-8")
    pending = only(judged(study, {"code": True}))

    assert pending[0] == "short"


def test_what_is_not_asked_for_is_not_read(tmp_path: Path) -> None:
    write(tmp_path, made_from(plots()), plots=OTHER)
    (tmp_path / "s.json").write_text(json.dumps(made_from(plots(), id="second")), encoding="utf-8")
    found = scan(tmp_path, ["**"], []).found

    none, first = freshness(tmp_path, found, [False, False]), freshness(tmp_path, found, [True, False])

    assert [facts.inputs for facts in none] == [(), ()]
    assert [[each.state for each in facts.inputs] for facts in first] == [["changed"], []]
