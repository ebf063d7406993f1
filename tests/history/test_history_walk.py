"""The walk through the commits: what each changed, in which order, and that what is not known is said."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from history.repositories import Repository, repository

from gatecheck import git
from gatecheck.errors import CannotJudge
from gatecheck.history.walk import Commit, History, has_history, history_of, line_of


def changes(commit: Commit) -> list[tuple[str, bool, bool]]:
    """Return the paths that a commit changes, and whether they are there before and after it."""
    return [(each.path, each.before is not None, each.after is not None) for each in commit.changes]


def ids(history: History) -> list[str]:
    """Return the ids of the commits."""
    return [commit.id for commit in history.commits]


def refusal(root: Path, revision: str = "HEAD") -> CannotJudge:
    """Return what the walk raises."""
    with pytest.raises(CannotJudge) as caught:
        history_of(root, revision)
    return caught.value


def test_commits_come_oldest_first_with_what_they_change(repo: Repository) -> None:
    first = repo.commit("2031-01-01", a="1", b="2")
    second = repo.commit("2031-01-02", a="3", b=None)
    third = repo.commit("2031-01-03")

    history = history_of(repo.root)

    assert ids(history) == [first, second, third]
    assert [changes(each) for each in history.commits] == [
        [("a.json", False, True), ("b.json", False, True)],
        [("a.json", True, True), ("b.json", True, False)],
        [],
    ]
    assert history.cut_at == ()
    assert history.commits[1].parents == (first,)
    assert (history.commits[1].author_name, history.commits[1].author_email) == (
        "someone",
        "someone@example.invalid",
    )
    assert [each.day for each in history.commits] == ["2031-01-01", "2031-01-02", "2031-01-03"]
    assert history.commits[0].changes[0].after == repo.git("rev-parse", f"{first}:a.json")


def test_what_a_path_held_through_time(repo: Repository) -> None:
    repo.commit(a="1")
    repo.commit(b="2")
    repo.commit(a=None)
    repo.commit(a="4")
    blob = repo.git("rev-parse", "HEAD:a.json")

    history = history_of(repo.root)

    assert history.versions("a.json") == ((0, history.versions("a.json")[0][1]), (2, None), (3, blob))
    assert history.versions("none.json") == ()
    assert (history.last_change("a.json"), history.last_change("b.json")) == (3, 1)
    assert history.last_change("none.json") is None
    assert history.first_with(["b.json", "none.json"]) == 1
    assert history.first_with(["b.json", "a.json"]) == 0
    assert history.first_with(["none.json"]) is None


def test_a_revision_other_than_the_head(repo: Repository) -> None:
    first = repo.commit(a="1")
    repo.commit(a="2")

    assert ids(history_of(repo.root, "HEAD~1")) == ids(history_of(repo.root, first)) == [first]
    assert "git knows no revision nowhere here" in refusal(repo.root, "nowhere").message


def test_paths_are_relative_to_the_judged_folder(repo: Repository) -> None:
    repo.put("inner/deep/a.json", "1")
    repo.put("outer.json", "2")
    repo.commit()
    repo.commit(outer="3")

    history = history_of(repo.root / "inner")

    assert [changes(each) for each in history.commits] == [[("deep/a.json", False, True)], []]


@pytest.mark.parametrize("name", ["line\nbreak.json", ":000000 1.json", "ünï.json", 'quo"te\\.json', "a b\t.json"])
def test_names_that_are_not_plain(repo: Repository, name: str) -> None:
    repo.put(name, "1")
    repo.commit()

    assert changes(history_of(repo.root).commits[0]) == [(name, False, True)]


def test_a_name_that_is_no_utf8(repo: Repository) -> None:
    name = os.fsdecode(b"caf\xe9.json")
    repo.put(name, "1")
    repo.commit()

    assert changes(history_of(repo.root).commits[0]) == [(name, False, True)]


def test_links_and_submodules_are_no_files(repo: Repository, tmp_path: Path) -> None:
    other = repository(tmp_path / "other")
    other.commit(a="1")
    repo.commit(a="1")
    repo.git("submodule", "add", "-q", str(other.root), "sub")
    (repo.root / "a.json").unlink()
    (repo.root / "a.json").symlink_to("b.json")
    repo.commit(b="2")

    assert changes(history_of(repo.root).commits[1]) == [
        (".gitmodules", False, True),
        ("a.json", True, False),
        ("b.json", False, True),
        ("sub", False, False),
    ]
    assert ids(history_of(repo.root / "sub")) == [other.git("rev-parse", "HEAD")]


def test_a_rename_is_one_file_less_and_one_more(repo: Repository) -> None:
    repo.commit(a="the same text")
    repo.commit(a=None, b="the same text")

    assert changes(history_of(repo.root).commits[1]) == [("a.json", True, False), ("b.json", False, True)]


def side_branch(repo: Repository) -> dict[str, str]:
    """Commit on a side branch and on the main one, and merge the first into the second."""
    made = {"root": repo.commit("2031-01-01", a="1")}
    repo.git("checkout", "-q", "-b", "side")
    made["side"] = repo.commit("2031-01-02", b="2")
    repo.git("checkout", "-q", "main")
    made["main"] = repo.commit("2031-01-03", a="3")
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "side")
    made["merge"] = repo.git("rev-parse", "HEAD")
    return made


def test_a_merge_brings_its_changes_onto_the_line(repo: Repository) -> None:
    made = side_branch(repo)

    history = history_of(repo.root)

    assert ids(history) == [made["root"], made["main"], made["merge"]]
    assert changes(history.commits[2]) == [("b.json", False, True)]
    assert history.commits[2].parents == (made["main"], made["side"])
    assert line_of(history) == set(ids(history))


def test_all_commits_are_walked_where_they_are_wanted(repo: Repository) -> None:
    made = side_branch(repo)

    history = history_of(repo.root, first_parent=False)

    assert sorted(ids(history)) == sorted(made.values())
    position = {name: ids(history).index(made[name]) for name in made}
    assert position["root"] == 0
    assert position["merge"] == 3
    merge = history.commits[3]
    assert changes(merge) == [("b.json", False, True)]
    assert line_of(history) == {made["root"], made["main"], made["merge"]}
    assert line_of(history, base="main") == set(made.values())
    assert line_of(History((), ())) == frozenset()


def test_an_octopus_merge_is_told_once(repo: Repository) -> None:
    repo.commit(a="1")
    for name in ("one", "two", "three"):
        repo.git("checkout", "-q", "-b", name, "main")
        repo.commit(**{name: name})
    repo.git("checkout", "-q", "main")
    repo.git("merge", "-q", "--no-ff", "-m", "all", "one", "two", "three")

    for first_parent, commits in ((True, 2), (False, 5)):
        history = history_of(repo.root, first_parent=first_parent)
        assert len(history.commits) == commits
        assert len(history.commits[-1].parents) == 4
        assert [each[0] for each in changes(history.commits[-1])] == ["one.json", "three.json", "two.json"]


def test_a_merge_that_git_tells_for_each_parent_is_taken_once(
    repo: Repository, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Versions of git before 2.32 do not know the setting log.diffMerges, and tell a merge for each parent."""
    side_branch(repo)
    monkeypatch.setattr("gatecheck.git_process._OVERRULED", ("-c", "log.diffMerges=separate"))
    told = git.pieces(repo.root, "log", "-m", "--raw", "-z", "--format=%H", "-1", "HEAD")
    assert len([piece for piece in told if len(piece) == 40]) == 2

    history = history_of(repo.root, first_parent=False)

    assert len(history.commits) == 4
    assert changes(history.commits[3]) == [("b.json", False, True)]


def test_which_commits_lead_to_which(repo: Repository) -> None:
    made = side_branch(repo)
    ancestry = history_of(repo.root, first_parent=False).ancestry

    root, side, main, merge = made["root"], made["side"], made["main"], made["merge"]
    assert all(ancestry.leads_to(each, merge) for each in (root, side, main, merge))
    assert ancestry.leads_to(root, side)
    assert not ancestry.leads_to(side, main)
    assert not ancestry.leads_to(merge, root)
    assert not any(ancestry.leads_to(*pair) for pair in (("f" * 40, merge), (merge, "f" * 40)))
    # What a merge brings along did not stand there before it.
    assert [ancestry.stood_before(each, merge) for each in (root, main, side, merge)] == [True, True, False, False]
    assert not ancestry.stood_before(root, root)


def test_two_roots_are_both_whole(repo: Repository) -> None:
    repo.commit(a="1")
    repo.git("checkout", "-q", "--orphan", "other")
    repo.commit(b="2")
    repo.git("checkout", "-q", "main")
    repo.git("merge", "-q", "--allow-unrelated-histories", "-m", "both", "other")

    history = history_of(repo.root, first_parent=False)

    assert (len(history.commits), history.cut_at) == (3, ())


def test_a_detached_head_and_a_linked_work_tree(repo: Repository, tmp_path: Path) -> None:
    first = repo.commit(a="1")
    second = repo.commit(a="2")
    repo.git("worktree", "add", "-q", "--detach", str(tmp_path / "linked"), "HEAD~1")

    assert ids(history_of(tmp_path / "linked")) == [first]
    repo.git("checkout", "-q", "--detach")
    assert ids(history_of(repo.root)) == [first, second]


def test_a_branch_without_a_commit_has_an_empty_history(repo: Repository) -> None:
    history = history_of(repo.root)

    assert (history.commits, history.cut_at) == ((), ())
    assert has_history(repo.root)
    repo.commit(a="1")
    repo.git("checkout", "-q", "--orphan", "another")
    assert history_of(repo.root).commits == ()


def test_a_folder_in_no_repository_has_no_history(tmp_path: Path) -> None:
    error = refusal(tmp_path)

    assert error.message == f"{tmp_path} is in no git repository, so it has no history"
    assert error.advice == "run in the clone of a repository"
    assert not has_history(tmp_path)


def test_a_shallow_clone_says_where_it_is_cut(repo: Repository, tmp_path: Path) -> None:
    made = [repo.commit(a=str(number)) for number in range(4)]
    shallow = repo.clone(tmp_path / "shallow", "--depth=2")

    history = history_of(shallow.root)

    assert ids(history) == made[2:]
    assert history.cut_at == (made[2],)
    shallow.git("fetch", "-q", "--unshallow", "origin")
    assert (ids(history_of(shallow.root)), history_of(shallow.root).cut_at) == (made, ())


def test_a_clone_of_all_commits_is_whole_although_its_depth_is_limited(repo: Repository, tmp_path: Path) -> None:
    made = [repo.commit(a=str(number)) for number in range(2)]
    shallow = repo.clone(tmp_path / "shallow", "--depth=5")

    assert (ids(history_of(shallow.root)), history_of(shallow.root).cut_at) == (made, ())


def test_a_merge_commit_alone_is_cut_at_itself(repo: Repository, tmp_path: Path) -> None:
    """It still names both parents, although none of them is there, as in the usual checkout of a runner."""
    made = side_branch(repo)
    shallow = repo.clone(tmp_path / "shallow", "--depth=1")

    history = history_of(shallow.root, first_parent=False)

    assert (ids(history), history.cut_at) == ([made["merge"]], (made["merge"],))


def test_grafts_and_replaced_commits_tell_no_other_history(repo: Repository) -> None:
    first = repo.commit(a="1")
    second = repo.commit(a="2")
    third = repo.commit(a="3")
    (repo.root / ".git" / "info" / "grafts").write_text(f"{third} {first}\n")
    replacement = repo.git("commit-tree", "HEAD^{tree}", "-m", "invented")
    repo.git("replace", second, replacement)
    assert repo.git("rev-list", "HEAD").split("\n") == [third, first]

    history = history_of(repo.root)

    assert (ids(history), history.cut_at) == ([first, second, third], ())


def test_a_graft_in_the_environment_tells_no_other_history(
    repo: Repository, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    made = [repo.commit(a=str(number)) for number in range(3)]
    for variable in ("GIT_GRAFT_FILE", "GIT_SHALLOW_FILE"):
        (tmp_path / variable).write_text(f"{made[2]}\n")
        monkeypatch.setenv(variable, str(tmp_path / variable))

    assert (ids(history_of(repo.root)), history_of(repo.root).cut_at) == (made, ())


def test_dates_change_no_order(repo: Repository) -> None:
    made = [repo.commit(day, a=day) for day in ("2031-01-01", "2001-09-09", "2029-01-01")]

    for first_parent in (True, False):
        history = history_of(repo.root, first_parent=first_parent)
        assert ids(history) == made
    assert history.commits[1].day == "2001-09-09"


def test_settings_change_nothing(repo: Repository, tmp_path: Path) -> None:
    side_branch(repo)
    repo.commit(a=None, moved="3")
    repo.put(".gitattributes", "*.json diff=odd\n")
    repo.put(".mailmap", "Another <another@example.invalid> <someone@example.invalid>\n")
    repo.commit()
    wanted = [(each.id, each.author_name, changes(each)) for each in history_of(repo.root).commits]
    spy = tmp_path / "spy"
    spy.write_text(f"#!/bin/sh\ntouch {tmp_path / 'was-run'}\n")
    spy.chmod(0o755)
    for name, value in {
        "color.ui": "always",
        "core.quotePath": "true",
        "diff.external": str(spy),
        "diff.odd.command": str(spy),
        "diff.odd.textconv": str(spy),
        "diff.noprefix": "true",
        "diff.renames": "copies",
        "diff.relative": "true",
        "diff.ignoreSubmodules": "all",
        "format.pretty": "oneline",
        "gpg.program": str(spy),
        "log.abbrevCommit": "true",
        "log.decorate": "full",
        "log.diffMerges": "combined",
        "log.follow": "true",
        "log.mailmap": "true",
        "log.showRoot": "false",
        "log.showSignature": "true",
        "log.date": "relative",
        "i18n.logOutputEncoding": "latin1",
    }.items():
        repo.git("config", name, value)

    told = [(each.id, each.author_name, changes(each)) for each in history_of(repo.root).commits]

    assert told == wanted
    assert told[0][2] == [("a.json", False, True)]
    assert not (tmp_path / "was-run").exists()


def test_odd_authors_and_times_are_kept_apart_from_what_is_changed(repo: Repository) -> None:
    repo.commit(a="1")
    tree = repo.git("rev-parse", "HEAD^{tree}")
    head = repo.git("rev-parse", "HEAD")
    for author, committer in (
        (b":000000 <> 1 +0000", b"x <x> 99999999999999 +0000"),
        (b"no time at all", b"nobody"),
        (b"M\xe4x <m\x01x> 5 +0000", b"x <x> -5 +0000"),
    ):
        raw = b"tree %s\nparent %s\nauthor %s\ncommitter %s\n\n%s\n"
        made = raw % (tree.encode(), head.encode(), author, committer, b"message\n:100644")
        (repo.root / ".git" / "odd").write_bytes(made)
        head = repo.git("hash-object", "-t", "commit", "-w", "--literally", ".git/odd")
    repo.git("reset", "-q", "--hard", head)

    history = history_of(repo.root)

    assert [len(each.changes) for each in history.commits] == [1, 0, 0, 0]
    assert history.commits[1].author_name == ":000000"
    assert [each.day for each in history.commits][1:] == ["no date", "1970-01-01", "1970-01-01"]
    assert [each.time for each in history.commits][2] == 0
    assert ids(history)[-1] == head


def test_a_repository_of_another_owner_is_no_empty_history(
    repo: Repository, monkeypatch: pytest.MonkeyPatch
) -> None:
    repo.commit(a="1")
    monkeypatch.setenv("GIT_TEST_ASSUME_DIFFERENT_OWNER", "1")

    error = refusal(repo.root)

    assert error.message == f"git does not read the repository at {repo.root}, since another user owns it"


def test_a_clone_without_contents_has_its_history(repo: Repository, tmp_path: Path) -> None:
    repo.commit(a="1")
    repo.commit(a="2")
    partial = repo.clone(tmp_path / "partial", "--filter=blob:none")

    history = history_of(partial.root)

    assert [changes(each) for each in history.commits] == [[("a.json", False, True)], [("a.json", True, True)]]
    assert partial.git("rev-list", "--objects", "--all", "--missing=print").count("?") == 1


def test_a_clone_without_folders_cannot_answer_and_fetches_nothing(repo: Repository, tmp_path: Path) -> None:
    repo.commit(a="1")
    repo.commit(a="2")
    partial = repo.clone(tmp_path / "partial", "--filter=tree:0")
    missing = partial.git("rev-list", "--objects", "--all", "--missing=print").count("?")

    error = refusal(partial.root)

    assert error.message.startswith(f"git log failed in {partial.root}: ")
    assert missing > 0
    assert partial.git("rev-list", "--objects", "--all", "--missing=print").count("?") == missing


def test_a_damaged_repository_is_no_shorter_history(repo: Repository) -> None:
    first = repo.commit(a="1")
    repo.commit(a="2")
    (repo.root / ".git" / "objects" / first[:2] / first[2:]).unlink()

    assert refusal(repo.root).message.startswith(f"git log failed in {repo.root}: ")


@pytest.mark.parametrize("content", ["", "0" * 40, "no id at all", "deadbeef" * 5])
def test_a_branch_that_git_cannot_read_is_not_taken_for_one_without_a_commit(
    repo: Repository, content: str
) -> None:
    repo.commit(a="1")
    (repo.root / ".git" / "refs" / "heads" / "main").write_text(f"{content}\n")

    assert refusal(repo.root).message.startswith(("git knows no revision HEAD", "git for-each-ref failed"))


def test_a_reader_of_pieces_may_stop_early(repo: Repository) -> None:
    for number in range(3):
        repo.commit(a=str(number))

    told = git.pieces(repo.root, "log", "-z", "--format=%H")
    assert next(told) == repo.git("rev-parse", "HEAD")
    told.close()  # type: ignore[attr-defined]  # a generator
    assert list(git.pieces(repo.root, "log", "-z", "--format=%H", "-1")) == [repo.git("rev-parse", "HEAD")]
