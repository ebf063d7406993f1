"""Who brought a record to what it says now: by what a permission rests on, and not by who touched its file last."""

from __future__ import annotations

import json
import os
import subprocess
from pathlib import Path
from typing import Any

import pytest
from permissions.permitting import found
from support import GIT_ENVIRONMENT, Document, changed, drainage, git

from gatecheck.permissions.authors import Authors, Changer

ADA, BO, CY = (
    f"{name} <{name.split()[0].lower()}@example.org>" for name in ("Ada Example", "Bo Sample", "Cy Model")
)
PATH = "results/drainage.json"


def commit(root: Path, author: str = ADA, **files: Any) -> str:
    """Write files below `results` (`a` is `a.json`; text as it is, else JSON) and commit everything."""
    if not (root / ".git").exists():
        git(root, "init", "-q")
    (root / "results").mkdir(exist_ok=True)
    for name, content in files.items():
        text = content if isinstance(content, str) else json.dumps(content, indent=1)
        (root / f"results/{name}.json").write_text(text, encoding="utf-8")
    git(root, "add", "-A")
    command = ["git", "commit", "-q", "--allow-empty", "-m", "x", f"--author={author}"]
    subprocess.run(command, cwd=root, env={**os.environ, **GIT_ENVIRONMENT}, check=True)
    return git(root, "rev-parse", "HEAD")


def of(root: Path, document: Document | None = None, path: str = PATH, *reads: str) -> tuple[Changer, ...]:
    """Who brought the record to what it says in `document`, which lies at `path`."""
    one = found(document, path)
    return Authors(root, [one.record.id]).of(one, reads)


def names(*changers: Changer) -> list[str]:
    """The authors as git writes them; all must be known."""
    assert [each.unknown for each in changers] == [""] * len(changers)
    return [f"{each.name} <{each.email}>" for each in changers]


def unknown(*changers: Changer) -> str:
    """Why the one author is not known."""
    (one,) = changers
    assert (one.name, one.email) == ("", "")
    return one.unknown


def test_who_brought_the_numbers_and_not_who_wrote_them_otherwise(tmp_path: Path) -> None:
    """Another layout, another wording, another order of the keys: none of them is a change of the numbers."""
    commit(tmp_path, ADA, drainage=drainage())
    commit(tmp_path, BO, drainage=json.dumps(drainage(), indent=7))
    worded = changed(dict(reversed(drainage().items())), claim="Draining helps earthworms.")
    commit(tmp_path, CY, drainage=worded)

    assert names(*of(tmp_path, worded)) == [ADA]
    assert names(*of(tmp_path, worded, PATH, "claim")) == [CY]


def test_who_changes_a_number_is_its_author(tmp_path: Path) -> None:
    """Who changes it back to what it was has brought it here, too."""
    commit(tmp_path, ADA, drainage=drainage())
    other = drainage(test__p="0.0339")
    commit(tmp_path, BO, drainage=other)
    after_bo = names(*of(tmp_path, other))
    commit(tmp_path, CY, drainage=drainage())

    assert after_bo == [BO]
    assert names(*of(tmp_path)) == [CY]


def test_a_file_that_is_moved_or_split_keeps_its_author(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage(), other=drainage(id="other"))
    git(tmp_path, "mv", PATH, "results/moved.json")
    commit(tmp_path, BO)
    (tmp_path / "results/moved.json").unlink()
    commit(tmp_path, CY, other=[drainage(id="other"), drainage(tags=["kept"])])

    assert names(*of(tmp_path, drainage(tags=["kept"]), "results/other.json")) == [ADA]


def test_another_id_with_its_alias_keeps_its_author(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage())
    renamed = drainage(id="drainage/worms", aliases=[drainage()["id"]])
    commit(tmp_path, BO, drainage=renamed)

    assert names(*of(tmp_path, renamed)) == [ADA]


def test_who_mends_a_broken_file_has_not_brought_its_numbers(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage())
    commit(tmp_path, BO, drainage=json.dumps(drainage())[:-9])
    commit(tmp_path, CY, drainage=drainage())

    assert names(*of(tmp_path)) == [ADA]


def test_who_puts_back_what_was_gone_has_brought_it(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage())
    git(tmp_path, "rm", "-q", PATH)
    commit(tmp_path, BO)
    commit(tmp_path, CY, drainage=drainage())

    assert names(*of(tmp_path)) == [CY]


def test_a_merge_brings_nothing_by_itself(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage(), other=drainage(id="other"))
    git(tmp_path, "checkout", "-q", "-b", "request")
    commit(tmp_path, BO, drainage=drainage(test__p="0.0339"))
    git(tmp_path, "checkout", "-q", "main")
    commit(tmp_path, CY, other=drainage(id="other", tags=["x"]))
    git(tmp_path, "merge", "-q", "--no-ff", "-m", "merge", "request")

    assert names(*of(tmp_path, drainage(test__p="0.0339"))) == [BO]
    assert names(*of(tmp_path, drainage(id="other", tags=["x"]), "results/other.json")) == [ADA]


def test_whoever_solves_a_conflict_with_other_numbers_is_their_author(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage())
    git(tmp_path, "checkout", "-q", "-b", "request")
    commit(tmp_path, BO, drainage=drainage(test__p="0.0339"))
    git(tmp_path, "checkout", "-q", "main")
    commit(tmp_path, ADA, drainage=drainage(test__p="0.0341"))
    git(tmp_path, "merge", "-q", "-s", "ours", "--no-commit", "request")
    commit(tmp_path, CY, drainage=drainage(test__p="0.0342"))

    assert names(*of(tmp_path, drainage(test__p="0.0342"))) == [CY]


def test_two_branches_that_bring_the_same_have_two_authors(tmp_path: Path) -> None:
    commit(tmp_path, CY, other="{}")
    git(tmp_path, "checkout", "-q", "-b", "request")
    commit(tmp_path, BO, drainage=drainage())
    git(tmp_path, "checkout", "-q", "main")
    commit(tmp_path, ADA, drainage=drainage())
    git(tmp_path, "merge", "-q", "--no-ff", "-m", "merge", "request")
    git(tmp_path, "merge", "-q", "--no-ff", "-m", "again", "-s", "ours", "request")

    assert sorted(names(*of(tmp_path))) == [ADA, BO]


def test_what_is_not_committed_is_of_nobody(tmp_path: Path) -> None:
    outside = unknown(*of(tmp_path))
    git(tmp_path, "init", "-q")
    unborn = unknown(*of(tmp_path))
    commit(tmp_path, ADA, drainage=drainage())
    (tmp_path / PATH).write_text(json.dumps(drainage(tags=["new"])), encoding="utf-8")
    edited = unknown(*of(tmp_path))
    (tmp_path / ".gitignore").write_text("ignored.json\n", encoding="utf-8")
    (tmp_path / "ignored.json").write_text(json.dumps(drainage(id="new")), encoding="utf-8")
    ignored = unknown(*of(tmp_path, drainage(id="new"), "ignored.json"))

    assert outside == "judge it in the git repository that holds its history"
    assert (unborn, edited) == ("commit it", "commit it")
    assert ignored == "the last commit does not hold it as it is here"


def test_paths_are_relative_to_the_judged_folder_and_taken_as_they_are(tmp_path: Path) -> None:
    inner = tmp_path / "in ner"
    inner.mkdir()
    commit(tmp_path, ADA, drainage=drainage())
    (inner / "[a]*.json").write_text(json.dumps(drainage()), encoding="utf-8")
    commit(tmp_path, BO)

    assert names(*of(inner, path="[a]*.json")) == [BO]


def test_the_persons_settings_change_no_name(tmp_path: Path) -> None:
    commit(tmp_path, ADA, drainage=drainage())
    (tmp_path / ".mailmap").write_text("Another <another@example.org> <ada@example.org>\n", encoding="utf-8")
    commit(tmp_path, BO)
    git(tmp_path, "config", "log.mailmap", "true")

    assert names(*of(tmp_path)) == [ADA]


def test_at_the_cut_of_a_shallow_clone_nobody_is_known(tmp_path: Path) -> None:
    """There, one commit seems to have added every file."""
    full, shallow = tmp_path / "full", tmp_path / "shallow"
    full.mkdir()
    commit(full, ADA, drainage=drainage())
    commit(full, BO, other=drainage(id="other"))
    commit(full, CY, drainage=json.dumps(drainage()))
    other = drainage(id="other", test__p="0.0339")
    commit(full, CY, other=other)
    git(tmp_path, "clone", "-q", "--depth=2", "-o", "field", full.as_uri(), str(shallow))

    assert names(*of(shallow, other, "results/other.json")) == [CY]
    told = unknown(*of(shallow))
    assert told == "the history of this clone is cut; run `git fetch --unshallow field`"
    subprocess.run(["bash", "-c", told.split("`")[1]], cwd=shallow, check=True, capture_output=True)
    assert names(*of(shallow)) == [ADA]


def test_in_a_partial_clone_nobody_is_known(tmp_path: Path) -> None:
    """What an earlier file said is not here, so that it may have been the same."""
    full, partial = tmp_path / "full", tmp_path / "partial"
    full.mkdir()
    commit(full, ADA, drainage=drainage(test__p="0.0339"))
    commit(full, BO, drainage=drainage())
    git(full, "config", "uploadpack.allowFilter", "true")
    git(tmp_path, "clone", "-q", "--filter=blob:none", "-o", "field", full.as_uri(), str(partial))

    told = unknown(*of(partial))
    assert told == (
        "an earlier file is not in this clone, a partial one; run `git fetch --refetch --no-filter field`, or "
        "clone without --filter"
    )
    subprocess.run(["bash", "-c", told.split("`")[1]], cwd=partial, check=True, capture_output=True)
    assert names(*of(partial)) == [BO]


@pytest.mark.parametrize(
    ("author", "told"),
    [
        ("author Ada <a@example.org> 5 +0000", Changer("Ada", "a@example.org")),
        ("author <a@example.org> 5 +0000", Changer("", "a@example.org")),
        ("author nobody", None),
    ],
)
def test_odd_authors(tmp_path: Path, author: str, told: Changer | None) -> None:
    commit(tmp_path, ADA, drainage=drainage())
    tree = git(tmp_path, "rev-parse", "HEAD^{tree}")
    # A signature holds whatever its maker likes, on lines that begin with a blank.
    signed = "gpgsig x\n author Forged <forged@example.org> 5 +0000\n"
    content = f"tree {tree}\n{signed}{author}\ncommitter Ada <a@example.org> 5 +0000\n\nauthor C <c@d> 1\n"
    command = ["git", "hash-object", "-w", "-t", "commit", "--literally", "--stdin"]
    made = subprocess.run(command, cwd=tmp_path, input=content.encode(), capture_output=True, check=True)
    name = made.stdout.decode().strip()
    git(tmp_path, "update-ref", "HEAD", name)

    (one,) = of(tmp_path)

    if told is None:
        assert one.unknown == f"commit {name[:12]} names no author"
    else:
        assert (one.name, one.email, one.unknown) == (told.name, told.email, "")
