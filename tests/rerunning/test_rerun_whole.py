"""A rerun from the tree to the outcome: what is chosen, what runs in the copy, and how the records compare."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from rerunning.rerunning_trees import emitting, notebook, output, place, showing, worms
from support import commit_all

from gatecheck.errors import CannotJudge
from gatecheck.model.exit import Exit
from gatecheck.model.rerun import Rerun
from gatecheck.model.rerun_settings import RerunSettings
from gatecheck.rerunning import rerun, to_run
from gatecheck.schema.read import read

ALL = (("**",), ())


def ran(folder: Path, *patterns: str, **settings: Any) -> Rerun:
    """Rerun what the patterns name, and see that the progress was told."""
    told: list[tuple[int, str]] = []
    paths = to_run(folder, patterns)
    found = rerun(folder, paths, RerunSettings(patterns, **settings), ALL, lambda *each: told.append(each))
    assert told == list(enumerate(paths, start=1))
    assert found.ran == paths
    return found


def test_settings_of_a_policy() -> None:
    settings, faults = read(RerunSettings, {"run": "a.py", "tolerance": 0, "minutes": 0.5})
    assert faults == ()
    assert settings is not None
    assert (settings.run, settings.tolerance, settings.minutes) == (("a.py",), 0.0, 0.5)

    settings, _ = read(RerunSettings, {})
    assert settings is not None
    assert (settings.run, settings.tolerance, settings.minutes) == ((), 1e-9, 10.0)

    _, faults = read(RerunSettings, {"tolerance": 1, "minutes": 0, "run": [" "]})
    assert {each.field for each in faults} == {"run[0]", "tolerance", "minutes"}
    _, faults = read(RerunSettings, {"minutes": 1e9})
    assert faults[0].advice == "give a number from above 0 to 10080"


def test_what_runs_is_in_the_order_of_the_policy_and_each_once(tmp_path: Path) -> None:
    place(tmp_path, dict.fromkeys(("b.py", "a.py", "deep/c.R", "n.ipynb", "data.csv", "[1].py", "1.py"), ""))

    assert to_run(tmp_path, ["n.ipynb", "deep/**", "*.py", "a.py"]) == (
        "n.ipynb", "deep/c.R", "1.py", "[1].py", "a.py", "b.py",
    )  # fmt: skip
    assert to_run(tmp_path, ["[1].py"]) == ("1.py", "[1].py")


@pytest.mark.parametrize("pattern", ["no.py", "data.csv", "*.csv", "../a.py", "link.py", "ignored.py", "gone.py"])
def test_a_pattern_that_names_nothing_to_run_is_refused(tmp_path: Path, pattern: str) -> None:
    place(tmp_path, {"a.py": "", "data.csv": "", "gone.py": "", ".gitignore": "ignored.py"})
    (tmp_path / "link.py").symlink_to("a.py")
    commit_all(tmp_path, "first")
    place(tmp_path, {"ignored.py": ""})
    (tmp_path / "gone.py").unlink()

    with pytest.raises(CannotJudge) as caught:
        to_run(tmp_path, ["a.py", pattern])

    assert caught.value.message == f"`rerun.run` names {pattern}, and there is no such notebook or script here"
    assert caught.value.advice == (
        "name files in .ipynb, .py or .R that git does not ignore, by their paths in the judged folder"
    )


def test_a_policy_that_names_nothing_is_refused(tmp_path: Path) -> None:
    with pytest.raises(CannotJudge, match=r"the policy names nothing to run: name .* in its `rerun\.run`"):
        to_run(tmp_path, [])


def test_scripts_and_notebooks_give_what_stands_in_the_tree(tmp_path: Path) -> None:
    place(
        tmp_path,
        {
            "a.py": emitting(worms()),
            "notes/n.ipynb": notebook(showing(worms(id="mites")), outputs=[output(worms(id="mites"))]),
            "results/r.json": worms(),
        },
    )
    commit_all(tmp_path, "first")
    before = {
        path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file() and ".git" not in path.parts
    }

    found = ran(tmp_path, "a.py", "notes/n.ipynb")

    assert (found.failures, found.problems, found.notes) == ((), (), ())
    assert found.compared.equal == ("mites", "worms")
    assert found.exit is Exit.STANDS
    assert before == {path: path.read_bytes() for path in before}


def test_records_that_stand_in_the_tree_do_not_pass_for_emitted(tmp_path: Path) -> None:
    """Neither a file nor an output of a notebook that emits nothing any more."""
    place(
        tmp_path,
        {
            "n.ipynb": notebook("1", outputs=[output(worms(id="mites"))]),
            "other.ipynb": notebook("1", outputs=[output(worms(id="springtails"))]),
            "results/r.json": worms(),
        },
    )

    found = ran(tmp_path, "n.ipynb")

    assert found.compared.not_emitted == ("mites", "springtails", "worms")
    assert found.exit is Exit.FALLS_SHORT


def test_other_numbers_fall_short_unless_within_the_tolerance(tmp_path: Path) -> None:
    place(tmp_path, {"a.py": emitting(worms(test__value=2.2101)), "results/r.json": worms()})

    found = ran(tmp_path, "a.py")
    assert [(each.id, [one.field for one in each.fields]) for each in found.compared.changed] == [
        ("worms", ["test.value"])
    ]
    assert found.exit is Exit.FALLS_SHORT

    found = ran(tmp_path, "a.py", tolerance=1e-3)
    assert found.compared.close == ("worms",)
    assert found.exit is Exit.STANDS


def test_a_new_record_falls_short(tmp_path: Path) -> None:
    found = ran(place(tmp_path, {"a.py": emitting(worms())}), "a.py")

    assert found.compared.new == ("worms",)
    assert found.exit is Exit.FALLS_SHORT


def test_later_runs_see_what_earlier_ones_made(tmp_path: Path) -> None:
    place(
        tmp_path,
        {
            "2.py": "open('made', 'w').close()",
            "1.py": f"open('made')\n{emitting(worms())}",
            "results/r.json": worms(),
        },
    )

    assert ran(tmp_path, "2.py", "1.py").exit is Exit.STANDS
    failed = ran(tmp_path, "1.py", "2.py")
    assert [each.path for each in failed.failures] == ["1.py"]
    assert failed.exit is Exit.CANNOT_JUDGE


def test_what_cannot_run_keeps_the_rest_from_nothing(tmp_path: Path) -> None:
    place(tmp_path, {"a.py": "1 / 0", "b.py": emitting(worms()), "results/r.json": worms()})

    found = ran(tmp_path, "*.py")

    assert [each.path for each in found.failures] == ["a.py"]
    assert found.compared.equal == ("worms",)
    assert found.exit is Exit.CANNOT_JUDGE


def test_a_record_emitted_twice(tmp_path: Path) -> None:
    """The same is one record; two of one id with other content cannot be told apart."""
    same = emitting(worms()) + emitting(worms(), "again.json")
    place(tmp_path, {"a.py": same, "results/r.json": worms()})
    assert ran(tmp_path, "a.py").exit is Exit.STANDS

    place(tmp_path, {"a.py": emitting(worms()) + emitting(worms(claim="Other."), "s.json")})
    found = ran(tmp_path, "a.py")
    assert [str(each.at) for each in found.problems] == ["results/s.json:1"]
    assert found.problems[0].message == "worms: this id already stands at results/r.json:1, with other content"
    assert found.exit is Exit.CANNOT_JUDGE


def test_records_that_cannot_be_read_are_told_once(tmp_path: Path) -> None:
    place(
        tmp_path,
        {"a.py": emitting(worms(test__p=7)), "b.json": worms(id="b", test__p=8), "results/r.json": worms()},
    )

    found = ran(tmp_path, "a.py")

    assert [(str(each.at), each.message) for each in found.problems] == [
        ("b.json:1", "b: test.p is 8, outside its range"),
        ("results/r.json:1", "worms: test.p is 7, outside its range"),
    ]
    assert found.exit is Exit.CANNOT_JUDGE


def test_no_record_at_all_is_no_agreement(tmp_path: Path) -> None:
    found = ran(place(tmp_path, {"a.py": ""}), "a.py")

    assert found.compared.records == 0
    assert found.exit is Exit.CANNOT_JUDGE


def test_a_folder_within_a_repository_runs_where_it_lies(tmp_path: Path) -> None:
    """Its code reaches its neighbours, and the root of the repository is that of the copy."""
    code = """
import pathlib
from gatecheck.declaring.provenance import repository_root
assert pathlib.Path("../plots.csv").read_text() == "1"
assert repository_root() == pathlib.Path.cwd().parent
"""
    place(tmp_path, {"plots.csv": "1", "study/a.py": code + emitting(worms()), "study/results/r.json": worms()})
    commit_all(tmp_path, "first")

    assert ran(tmp_path / "study", "a.py").exit is Exit.STANDS


def test_a_copy_is_no_sandbox(tmp_path: Path) -> None:
    """A script that names a path outside reaches it, as the documents say."""
    tree = place(tmp_path / "tree", {"a.py": f"open({str(tmp_path / 'outside')!r}, 'w').close()"})

    ran(tree, "a.py")

    assert (tmp_path / "outside").exists()


def test_the_copy_is_removed_with_what_was_made_in_it(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path / "temporary"))
    (tmp_path / "temporary").mkdir()
    code = "import os\nos.makedirs('made/deep')\nopen('made/deep/x', 'w').close()\nos.chmod('made/deep/x', 0)"
    tree = place(tmp_path / "tree", {"a.py": code})

    ran(tree, "a.py")

    assert list((tmp_path / "temporary").iterdir()) == []
