"""Which results of a record are looks at growing data, and what keeps their number from being known."""

from __future__ import annotations

from pathlib import Path

import pytest
from history.repositories import ID, Repository, repository, result, with_looks
from support import Document

from gatecheck.errors import CannotJudge
from gatecheck.history.looks import looks_of_records
from gatecheck.model.looks_seen import LooksSeen, day_of
from gatecheck.scan import scan


def looks_at(root: Path, base: str | None = None, record_id: str = ID) -> LooksSeen:
    """Return what the history shows of one record of the tree."""
    found = scan(root, ["**"], []).found
    every = looks_of_records(root, found, base=base)
    assert len(every) == len(found)
    (one,) = (each for each, record in zip(every, found, strict=True) if record.record.id == record_id)
    assert one is not None
    return one


def told(looks: LooksSeen) -> list[tuple[str, float | None]]:
    """Return what each result is, and from how many units."""
    return [(each.change, each.size) for each in looks.results]


def after(folder: Path, *states: Document) -> LooksSeen:
    """Return the looks at a record that had these states in turn, one a commit."""
    made = repository(folder / "repo")
    for state in states:
        made.commit(r=state)
    return looks_at(made.root)


def test_results_from_more_units_each_are_looks(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")

    looks = looks_at(repo.root)

    assert told(looks) == [("look", 20), ("look", 40), ("look", 60), ("look", 80), ("look", 100)]
    assert (looks.known, looks.why, looks.advice, looks.gaps) == (True, "", "", 0)
    assert [each.day for each in looks.looks] == [f"2031-0{number}-02" for number in range(1, 6)]
    assert [each.commit for each in looks.looks] == repo.git("rev-list", "--reverse", "HEAD").split("\n")


@pytest.mark.parametrize(
    ("states", "wanted"),
    [
        # The same numbers again, with other words around them.
        ([result(0.2, 20), result(0.2, 20, claim="Another sentence.")], [("look", 20)]),
        # As many units with another result: other data or other code.
        ([result(0.2, 20), result(0.1, 20)], [("look", 20), ("other", 20)]),
        # Fewer units, and then as many as before.
        ([result(0.2, 40), result(0.1, 30), result(0.3, 40)], [("look", 40), ("smaller", 30), ("other", 40)]),
        # A first number beyond measure hides no later look.
        ([result(0.2, 900), result(0.1, 20), result(0.3, 40)], [("look", 900), ("smaller", 20), ("look", 40)]),
        # Back to what it was.
        ([result(0.2, 20), result(0.1, 40), result(0.2, 20)], [("look", 20), ("look", 40)]),
        # The same result from a number of units that is told otherwise.
        ([result(0.2, 20), result(0.2, 22)], [("look", 20), ("other", 22)]),
        # More digits, and more figures, of the same result.
        ([result(0.2, 20, test__p="0.2"), result(0.2, 20, test__p="0.213")], [("look", 20)]),
        (
            [
                result(0.2, 20),
                result(0.2, 20, estimate={"measure": "d", "value": 3, "interval": {"level": 0.9, "low": 1}}),
            ],
            [("look", 20)],
        ),
        # Groups tell the units where n does not.
        (
            [
                result(0.2, 0, sample={"groups": [{"name": "a", "n": 5, "events": 2}, {"name": "b", "n": 6}]}),
                result(0.1, 0, sample={"groups": [{"name": "a", "n": 9, "events": 3}, {"name": "b", "n": 9}]}),
            ],
            [("look", 11), ("look", 18)],
        ),
        # Events count as numbers of the result.
        (
            [
                result(0.2, 0, sample={"groups": [{"name": "a", "n": 5, "events": 2}]}, test={"name": "exact"}),
                result(0.2, 0, sample={"groups": [{"name": "a", "n": 5, "events": 3}]}, test={"name": "exact"}),
            ],
            [("look", 5), ("other", 5)],
        ),
    ],
)
def test_what_each_result_is_beside_the_earlier_ones(
    tmp_path: Path, states: list[Document], wanted: list[tuple[str, float]]
) -> None:
    assert told(after(tmp_path, *states)) == wanted


def test_degrees_of_freedom_grow_with_units_that_are_never_told(tmp_path: Path) -> None:
    states = [
        result(0.2, 0, sample=..., test={"statistic": "t", "value": value, "df": df, "p": p})
        for value, df, p in ((1.1, 18, 0.29), (1.5, 38, 0.14))
    ]

    assert told(after(tmp_path, *states)) == [("look", 18), ("look", 38)]


@pytest.mark.parametrize(
    ("several", "states"),
    [
        ("a result of this record", [result(0.2, 0, sample=...), result(0.1, 20)]),
        ("2 results of this record", [result(p, 0, sample={"unit": "plot"}) for p in (0.2, 0.1, 0.03)]),
        ("a result of this record", [
            result(0.2, 20, sample=..., test={"statistic": "chi2", "value": value, "df": 1}) for value in (2, 3)
        ]),
    ],
)  # fmt: skip
def test_results_without_a_number_of_units_may_be_looks(
    tmp_path: Path, several: str, states: list[Document]
) -> None:
    looks = after(tmp_path, *states)

    assert not looks.known
    assert looks.why == (
        f"How many looks were taken is not known: the history holds {several} without the number of units."
    )
    assert looks.advice == "give sample.n, and give other results an id of their own"
    assert len(looks.looks) == 1


def test_a_single_result_needs_no_number_of_units(tmp_path: Path) -> None:
    states = [result(0.2, 0, sample=..., role=role) for role in ("primary", "secondary")]

    looks = after(tmp_path, *states)

    assert (looks.known, told(looks)) == (True, [("look", None)])


def test_the_tree_as_it_is_comes_last(repo: Repository) -> None:
    repo.commit(r=result(0.2, 20))
    repo.put("r.json", result(0.1, 40))

    looks = looks_at(repo.root)

    assert [(each.commit is None, each.day) for each in looks.looks] == [(False, "2031-01-01"), (True, "")]
    repo.put("r.json", result(0.2, 20))
    assert told(looks_at(repo.root)) == [("look", 20)]


def test_a_record_that_was_never_committed_has_one_look(repo: Repository) -> None:
    repo.put("r.json", result(0.2, 20))

    assert told(looks_at(repo.root)) == [("look", 20)]
    repo.commit(other="1")
    repo.git("rm", "-q", "--cached", "r.json")
    assert told(looks_at(repo.root)) == [("look", 20)]


def test_a_look_on_a_side_branch_counts_and_is_marked(repo: Repository) -> None:
    repo.commit(r=result(0.4, 20))
    repo.git("checkout", "-q", "-b", "side")
    repo.commit(r=result(0.2, 40))
    repo.commit(r=result(0.4, 20), other="1")
    repo.git("checkout", "-q", "main")
    repo.commit(r=result(0.03, 60))
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "-X", "ours", "side")

    looks = looks_at(repo.root)

    assert sorted((each.size, each.on_line) for each in looks.looks) == [(20, True), (40, False), (60, True)]
    assert all(each.on_line for each in looks_at(repo.root, base="HEAD^1").looks)


def test_a_look_that_a_merge_brings_onto_the_line_counts_once(repo: Repository) -> None:
    repo.commit(r=result(0.4, 20))
    repo.git("checkout", "-q", "-b", "side")
    brought = repo.commit(r=result(0.2, 40))
    repo.git("checkout", "-q", "main")
    repo.commit(other="1")
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "side")

    looks = looks_at(repo.root)

    assert [(each.size, each.on_line) for each in looks.looks] == [(20, True), (40, True)]
    assert looks.looks[1].commit == brought


def test_looks_on_both_sides_of_a_merge(repo: Repository) -> None:
    """From 30 units is no more than from 60 on the line, but nobody had seen it there: a look of its own."""
    repo.commit(r=result(0.4, 20))
    repo.git("checkout", "-q", "-b", "side")
    repo.commit(r=result(0.3, 30))
    repo.git("checkout", "-q", "main")
    repo.commit(r=result(0.2, 60))
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "-X", "ours", "side")

    assert sorted(told(looks_at(repo.root))) == [("look", 20), ("look", 30), ("look", 60)]


def test_a_squashed_history_shows_what_is_left_of_it(repo: Repository) -> None:
    repo.commit(other="1")
    repo.git("checkout", "-q", "-b", "side")
    for p, n in ((0.4, 20), (0.2, 40)):
        repo.commit(r=result(p, n))
    repo.git("checkout", "-q", "main")
    repo.git("merge", "-q", "--squash", "side")
    repo.commit()

    assert told(looks_at(repo.root)) == [("look", 40)]


def test_dates_do_not_decide_on_the_order(repo: Repository) -> None:
    for day, (p, n) in zip(("2031-01-01", "2001-01-01"), ((0.4, 20), (0.2, 40)), strict=True):
        repo.commit(day, r=result(p, n))

    assert told(looks_at(repo.root)) == [("look", 20), ("look", 40)]


def test_looks_under_an_earlier_id_and_in_another_file_count(repo: Repository) -> None:
    repo.commit(old=result(0.4, 20, id="old"))
    repo.commit(old=None, new=result(0.2, 40, aliases=["old"]))

    assert told(looks_at(repo.root)) == [("look", 20), ("look", 40)]


def test_globs_of_the_scan_hold_for_the_history_too(repo: Repository) -> None:
    repo.put("scratch/r.json", result(0.4, 20))
    repo.commit()
    repo.git("rm", "-q", "-r", "scratch")
    repo.commit(r=result(0.2, 40))
    found = scan(repo.root, ["**"], []).found

    (everywhere,) = looks_of_records(repo.root, found)
    (elsewhere,) = looks_of_records(repo.root, found, exclude=["scratch/**"])

    assert everywhere is not None
    assert elsewhere is not None
    assert (len(everywhere.looks), len(elsewhere.looks)) == (2, 1)


@pytest.mark.parametrize(("depth", "seen"), [(1, 1), (2, 2)])
def test_a_shallow_clone_does_not_know_and_says_what_to_fetch(tmp_path: Path, depth: int, seen: int) -> None:
    repo = with_looks(tmp_path / "repo")
    shallow = repo.clone(tmp_path / "shallow", f"--depth={depth}")
    cut = repo.git("rev-parse", f"HEAD~{depth - 1}")

    looks = looks_at(shallow.root)

    assert (looks.known, len(looks.looks)) == (False, seen)
    assert looks.why == f"How many looks were taken is not known (history cut at {cut[:12]})."
    assert looks.advice == "run `git fetch --unshallow origin`; with actions/checkout, set `fetch-depth: 0`"
    shallow.git("fetch", "--unshallow", "origin")
    assert (looks_at(shallow.root).known, len(looks_at(shallow.root).looks)) == (True, 5)


def test_what_is_told_to_fetch_completes_the_checkout_of_a_pull_request(tmp_path: Path) -> None:
    """A runner fetches nothing but the merge that the forge keeps beside the branches."""
    repo = with_looks(tmp_path / "repo")
    repo.git("checkout", "-q", "-b", "side")
    repo.commit(r=result(0.01, 120))
    repo.git("checkout", "-q", "--detach", "main")
    repo.git("merge", "-q", "--no-ff", "-m", "merged", "side")
    repo.git("update-ref", "refs/pull/1/merge", "HEAD")
    repo.git("checkout", "-q", "main")
    repo.git("branch", "-q", "-D", "side")
    runner = repository(tmp_path / "runner")
    runner.git("remote", "add", "origin", f"file://{repo.root}")
    runner.git("fetch", "-q", "--depth=1", "origin", "refs/pull/1/merge:refs/remotes/pull/1/merge")
    runner.git("checkout", "-q", "--detach", "refs/remotes/pull/1/merge")
    assert not looks_at(runner.root).known

    runner.git("fetch", "-q", "--unshallow", "origin")

    looks = looks_at(runner.root, base="HEAD^1")
    assert (looks.known, len(looks.looks)) == (True, 6)
    assert all(each.on_line for each in looks.looks)


def test_several_cuts_are_named(repo: Repository, tmp_path: Path) -> None:
    repo.commit(other="1")
    repo.commit(r=result(0.4, 20))
    sides = [f"s{number}" for number in range(4)]
    for name in sides:
        repo.git("checkout", "-q", "-b", name, "main")
        repo.commit(**{name: name})
    repo.git("checkout", "-q", "main")
    repo.git("merge", "-q", "--no-ff", "-m", "all", *sides)
    shallow = repo.clone(tmp_path / "shallow", "--depth=2")
    cut = shallow.git("rev-list", "--max-parents=0", "HEAD").split("\n")

    why = looks_at(shallow.root).why

    assert len(cut) == 5
    assert why.startswith("How many looks were taken is not known (history cut at ")
    assert why.endswith(" and 2 more).")
    assert sum(name[:12] in why for name in cut) == 3


def test_a_partial_clone_does_not_know_and_says_what_to_fetch(tmp_path: Path) -> None:
    repo = with_looks(tmp_path / "repo")
    partial = repo.clone(tmp_path / "partial", "--filter=blob:none")

    looks = looks_at(partial.root)

    assert (looks.known, len(looks.looks)) == (False, 1)
    missing = "the content of 4 earlier files is not in this clone, a partial one"
    assert looks.why == f"How many looks were taken is not known ({missing})."
    assert looks.advice == "run `git fetch --refetch --no-filter origin`, or clone without --filter"
    partial.git("fetch", "-q", "--refetch", "--no-filter", "origin")
    assert (looks_at(partial.root).known, len(looks_at(partial.root).looks)) == (True, 5)


def test_texts_that_cannot_be_read_are_counted_where_they_name_the_record(repo: Repository) -> None:
    repo.commit(r='{"gatecheck": "record/1", "id": "drainage/earthworm-biomass", ')
    repo.commit(r=result(0.2, 20), s='{"gatecheck": "record/1", "id": "another", ')
    repo.commit(s=result(0.4, 20, id="another"))

    assert looks_at(repo.root).gaps == 1
    assert told(looks_at(repo.root)) == [("look", 20)]
    assert looks_at(repo.root, record_id="another").gaps == 1


def test_without_a_repository_nothing_is_seen(tmp_path: Path) -> None:
    plain = tmp_path / "plain"
    plain.mkdir()
    Repository(plain).put("r.json", result(0.2, 20))

    assert looks_of_records(plain, scan(plain, ["**"], []).found) == (None,)
    assert looks_of_records(plain, ()) == ()


def test_git_that_fails_is_no_history_without_looks(repo: Repository, monkeypatch: pytest.MonkeyPatch) -> None:
    repo.commit(r=result(0.2, 20))
    found = scan(repo.root, ["**"], []).found
    monkeypatch.setenv("GIT_TEST_ASSUME_DIFFERENT_OWNER", "1")

    with pytest.raises(CannotJudge, match="another user owns it"):
        looks_of_records(repo.root, found)


@pytest.mark.parametrize(
    ("time", "day"),
    [
        (0, "1970-01-01"),
        (1_930_000_000, "2031-02-27"),
        (-86_400, "1969-12-31"),
        (10**15, "no date"),
        (10**30, "no date"),
    ],
)
def test_a_date_is_whatever_git_was_told(time: int, day: str) -> None:
    assert day_of(time) == day
