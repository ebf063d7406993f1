"""Advice on what a clone lacks: each command is run as it stands, and what was missing is then there."""

from __future__ import annotations

import shlex
import subprocess
from pathlib import Path

import pytest
from scan.scanning import Git, Write

from gatecheck.errors import CannotJudge
from gatecheck.fetching import commit_advice, contents_advice, history_advice
from gatecheck.git import resolve

HERE = "name a commit that is here"


def commits(git: Git, count: int, name: str) -> list[str]:
    """Make commits, each with a file of its own, and return their ids."""
    made = []
    for number in range(count):
        git("commit", "-q", "--allow-empty", "-m", f"{name} {number}")
        made.append(git("rev-parse", "HEAD"))
    return made


@pytest.fixture
def history(git: Git) -> list[str]:
    """The line of `main`, with a branch `study` of three commits, their merge `request/merge` and a tag `v1`."""
    main = commits(git, 5, "main")
    git("tag", "-a", "v1", "-m", "release", main[1])
    git("checkout", "-q", "-b", "study")
    commits(git, 3, "study")
    git("checkout", "-q", "main")
    main += commits(git, 1, "more")
    git("checkout", "-q", "-b", "temporary")
    git("merge", "-q", "--no-ff", "-m", "merge", "study")
    git("update-ref", "refs/requests/1/merge", "HEAD")
    git("checkout", "-q", "main")
    git("branch", "-q", "-D", "temporary")
    return main


def cloned(git: Git, root: Path, *arguments: str) -> Path:
    """A clone of one branch, whose remote is called `field`."""
    folder = root.parent / "clone"
    git("init", "-q", "-b", "work", str(folder))
    git("remote", "add", "field", root.as_uri(), at=folder)
    git("fetch", "-q", *arguments, at=folder)
    git("checkout", "-q", "--detach", "FETCH_HEAD", at=folder)
    return folder


def advice_on(clone: Path, revision: str) -> str:
    """What is advised for a revision that is not here."""
    with pytest.raises(CannotJudge) as caught:
        resolve(clone, revision)
    return caught.value.advice


def followed(clone: Path, revision: str) -> str:
    """Do what is advised for a revision, as a person would in a shell, and return the commit that it then names."""
    advice = advice_on(clone, revision)
    named = revision
    for code in advice.split("`")[1::2]:
        if code.startswith("git fetch "):
            subprocess.run(["bash", "-c", code], cwd=clone, check=True, capture_output=True)
        else:
            option, named = shlex.split(code)
            assert option == "--base"
    return resolve(clone, named)


SHALLOW = ("--depth=1", "field", "study")
WHOLE = ("field", "study")


@pytest.mark.parametrize("arguments", [SHALLOW, WHOLE])
@pytest.mark.parametrize("name", ["main", "field/main", "refs/remotes/field/main", "remotes/field/main"])
def test_a_branch_that_is_not_here(
    git: Git, root: Path, history: list[str], arguments: tuple[str, ...], name: str
) -> None:
    clone = cloned(git, root, *arguments)
    depth = "--depth=1 " if arguments == SHALLOW else ""
    then = ", and then name `--base field/main`" if name == "main" else ""

    advice = advice_on(clone, name)

    assert advice == f"run `git fetch {depth}field main:refs/remotes/field/main`{then}"
    assert followed(clone, name) == history[-1]


@pytest.mark.parametrize(
    ("name", "position", "command"),
    [
        ("v1", 1, "v1:refs/remotes/field/v1`, and then name `--base field/v1`"),
        ("refs/tags/v1", 1, "refs/tags/v1:refs/tags/v1`"),
        ("refs/heads/main", -1, "refs/heads/main:refs/heads/main`"),
        ("main~2", -3, "main:refs/remotes/field/main`, and then name `--base 'field/main~2'`"),
    ],
)
def test_other_names(git: Git, root: Path, history: list[str], name: str, position: int, command: str) -> None:
    clone = cloned(git, root, *SHALLOW)
    depth = 3 if "~" in name else 1

    assert advice_on(clone, name) == f"run `git fetch --depth={depth} field {command}"
    assert followed(clone, name) == history[position]


def test_a_branch_with_letters_of_its_own(git: Git, root: Path, history: list[str]) -> None:
    """The command is quoted where a shell would read something into the name."""
    git("branch", "größe/(a)&b", history[0])
    clone = cloned(git, root, *SHALLOW)

    assert "'größe/(a)&b:refs/remotes/field/größe/(a)&b'" in advice_on(clone, "größe/(a)&b")
    assert followed(clone, "größe/(a)&b") == history[0]


@pytest.mark.parametrize("arguments", [SHALLOW, WHOLE])
def test_an_id_that_is_not_here(git: Git, root: Path, history: list[str], arguments: tuple[str, ...]) -> None:
    clone = cloned(git, root, *arguments)
    depth = "--depth=1 " if arguments == SHALLOW else ""

    assert advice_on(clone, history[-1]) == f"run `git fetch {depth}field {history[-1]}`"
    assert followed(clone, history[-1]) == history[-1]
    assert advice_on(clone, "1234567") == "name the commit by its full id"


def test_a_branch_that_is_here_by_the_name_of_its_remote(git: Git, root: Path, history: list[str]) -> None:
    """A whole clone without a local branch of that name has nothing to fetch."""
    clone = root.parent / "clone"
    git("clone", "-q", "-o", "field", "-b", "study", root.as_uri(), str(clone))

    assert advice_on(clone, "main") == "name `--base field/main`, which is here"
    assert followed(clone, "main") == history[-1]
    assert followed(clone, "main~1") == history[-2]
    git("remote", "add", "other", root.as_uri(), at=clone)
    git("fetch", "-q", "other", at=clone)
    assert advice_on(clone, "main") == "name `--base field/main` or `--base other/main`, which is here"


@pytest.mark.parametrize(
    ("name", "back"), [("HEAD^1", 1), ("HEAD^", 1), ("HEAD^2~2", 3), ("HEAD~4", 4), ("@~1", 1)]
)
def test_the_parents_of_a_merge_that_is_all_there_is(
    git: Git, root: Path, history: list[str], name: str, back: int
) -> None:
    """As a build checks it out: one commit, of which no branch of the clone knows."""
    clone = cloned(git, root, "--depth=1", "field", "refs/requests/1/merge")
    head = git("rev-parse", "HEAD", at=clone)
    whole = git("rev-parse", name.replace("HEAD", head).replace("@", head))

    assert advice_on(clone, name) == f"run `git fetch --deepen={back} field {head}`"
    assert followed(clone, name) == whole
    assert history[0] != whole


def test_several_cuts_are_mended_at_once(git: Git, root: Path, history: list[str]) -> None:
    clone = cloned(git, root, "--depth=2", "field", "refs/requests/1/merge")

    assert advice_on(clone, "HEAD~3") == "run `git fetch --unshallow field`"
    assert followed(clone, "HEAD~3") == history[-3]


def test_commits_that_nothing_brings(git: Git, root: Path, history: list[str]) -> None:
    clone = cloned(git, root, *WHOLE)

    for name in (
        "HEAD~99",
        "HEAD^3",
        "HEAD@{1}",
        "a b",
        "a..b",
        "--all",
        "",
        "x:y",
        "MERGE_HEAD",
        "\u202e",
        "m" * 201,
    ):
        assert commit_advice(clone, name) == HERE
    assert commit_advice(root, "nowhere") == f"{HERE}, as this clone has no remote to fetch from"
    assert len(history) == 6


def test_of_several_remotes_the_usual_one_is_asked(git: Git, root: Path, history: list[str]) -> None:
    clone = cloned(git, root, *SHALLOW)
    git("remote", "add", "origin", root.as_uri(), at=clone)

    assert history_advice(clone) == "run `git fetch --unshallow origin`"
    git("remote", "remove", "origin", at=clone)
    assert history_advice(clone) == "run `git fetch --unshallow field`"
    git("remote", "remove", "field", at=clone)
    assert history_advice(clone) == "clone it anew, with its whole history"
    assert len(history) == 6


def test_contents_that_are_lost(git: Git, root: Path, write: Write) -> None:
    """A whole clone that lacks something is damaged, and no fetch is told to mend it; a partial one is filled."""
    write("a.json", "{}")
    git("add", ".")
    git("commit", "-q", "-m", "files")
    git("config", "uploadpack.allowFilter", "true")
    partial = root.parent / "partial"
    git("clone", "-q", "--no-checkout", "--filter=blob:none", "-o", "field", root.as_uri(), str(partial))
    missing = ("rev-list", "--objects", "--missing=print", "--all")

    assert contents_advice(root) == (
        "this clone, although it is no partial one",
        "run `git fsck`, which names what is lost, and clone anew",
    )
    clone, advice = contents_advice(partial)
    assert (clone, advice) == (
        "this clone, a partial one",
        "run `git fetch --refetch --no-filter field`, or clone without --filter",
    )
    assert "?" in git(*missing, at=partial)
    subprocess.run(["bash", "-c", advice.split("`")[1]], cwd=partial, check=True, capture_output=True)
    assert "?" not in git(*missing, at=partial)
    git("config", "extensions.partialClone", "field", at=partial)
    git("remote", "remove", "field", at=partial)
    assert contents_advice(partial)[1] == "clone without --filter"
