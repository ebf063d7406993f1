"""The command `seal`: it freezes a plan, overwrites nothing and says what differs."""

from __future__ import annotations

import json
import os
from pathlib import Path

import pytest
from plans.planting import PLAN, hypothesis
from support import command

from gatecheck.cli import main
from gatecheck.plans.canonical import digest_of
from gatecheck.plans.reading import seal_of


@pytest.fixture
def plan(tmp_path: Path) -> Path:
    file = tmp_path / "drainage.yaml"
    file.write_text(json.dumps(PLAN), encoding="utf-8")
    return file


def seal_beside(plan: Path) -> Path:
    return plan.with_name(plan.name + ".seal.json")


def test_a_plan_is_sealed(plan: Path) -> None:
    done = command("seal", plan.name, cwd=plan.parent)

    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout == (
        f"drainage.yaml was sealed in drainage.yaml.seal.json: {digest_of(PLAN)}.\n"
        "Commit both to the base, in a commit of their own, before the data and the results. A signed tag on that "
        "commit (`git tag -s`), or a time-stamp token on the seal in drainage.yaml.tsr, raises the grade of "
        "evidence that the plan came first.\n"
    )
    assert json.loads(seal_beside(plan).read_text("ascii")) == {
        "gatecheck": "seal/1",
        "plan": "drainage.yaml",
        "id": "drainage",
        "digest": digest_of(PLAN),
    }
    assert seal_of("s.json", seal_beside(plan).read_bytes())[1] == ()


def test_sealing_again_changes_nothing(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["seal", str(plan)])
    seal_beside(plan).write_text(json.dumps(json.loads(seal_beside(plan).read_text("ascii"))), encoding="ascii")
    before = seal_beside(plan).read_bytes()
    plan.write_text("# a comment\n" + json.dumps(PLAN, indent=2, sort_keys=True), encoding="utf-8")
    capsys.readouterr()

    assert main(["seal", str(plan)]) == 0
    assert capsys.readouterr().out == f"{plan} is sealed already and has not changed since: {digest_of(PLAN)}.\n"
    assert seal_beside(plan).read_bytes() == before


def test_a_changed_plan_is_not_sealed_again(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    main(["seal", str(plan)])
    before = seal_beside(plan).read_bytes()
    plan.write_text(json.dumps(hypothesis(sides=1)), encoding="utf-8")

    assert main(["seal", str(plan)]) == 3
    assert capsys.readouterr().err == (
        f"gatecheck: cannot judge: the plan has changed since it was sealed: {seal_beside(plan)} holds "
        f"{digest_of(PLAN)}, and what the plan says now has {digest_of(hypothesis(sides=1))}; restore the plan and "
        "disclose the change under deviations of the record, or write a new plan file.\n"
    )
    assert seal_beside(plan).read_bytes() == before


def test_filling_a_deferred_slot_keeps_the_seal(plan: Path) -> None:
    plan.write_text(json.dumps(hypothesis(n={"deferred": True, "unit": "plot"})), encoding="utf-8")
    assert main(["seal", str(plan)]) == 0
    plan.write_text(json.dumps(hypothesis(n={"deferred": True, "unit": "plot", "planned": 44})), encoding="utf-8")

    assert main(["seal", str(plan)]) == 0


def test_a_plan_with_faults_is_not_sealed(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plan.write_text("gatecheck: plan/1\nid: x\ntitel: T\ndata: none\n", encoding="utf-8")

    assert main(["seal", str(plan)]) == 3
    assert capsys.readouterr().out == (
        f"{plan}:3: titel is no known key; the nearest known one is title (known: data, families, gatecheck, "
        "hypotheses, id, title).\n"
        f"{plan}:1: title is missing; give it: title.\n"
    )
    assert not seal_beside(plan).exists()


@pytest.mark.parametrize("name", ["none.yaml", ".", "no/where.yaml"])
def test_a_plan_that_is_not_there(plan: Path, name: str, capsys: pytest.CaptureFixture[str]) -> None:
    named = str(plan.parent / name)

    assert main(["seal", named]) == 3
    assert "there is no plan " in capsys.readouterr().err


def test_wrong_usage(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as left:
        main(["seal"])
    assert left.value.code == 2
    assert "PLAN" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("{", "is there and cannot be read: the text is no JSON"),
        ('{"gatecheck": "seal/1"}', "is there and cannot be read: plan is missing, at "),
        (
            json.dumps({"gatecheck": "seal/1", "plan": "other.yaml", "id": "drainage", "digest": digest_of(PLAN)}),
            "is the seal of the plan other.yaml (drainage); restore it from the history",
        ),
    ],
)
def test_a_seal_that_is_another_thing_stays(
    plan: Path, text: str, says: str, capsys: pytest.CaptureFixture[str]
) -> None:
    seal_beside(plan).write_text(text, encoding="ascii")

    assert main(["seal", str(plan)]) == 3
    assert says in capsys.readouterr().err
    assert seal_beside(plan).read_text("ascii") == text


def test_nothing_is_written_through_a_link(plan: Path, capsys: pytest.CaptureFixture[str]) -> None:
    outside = plan.parent / "outside"
    seal_beside(plan).symlink_to(outside)

    assert main(["seal", str(plan)]) == 3
    assert "is a symbolic link" in capsys.readouterr().err
    assert not outside.exists()


def test_a_folder_that_cannot_be_written(
    plan: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, os.strerror(13))

    monkeypatch.setattr(Path, "open", refuse)

    assert main(["seal", str(plan)]) == 3
    assert "cannot be written (Permission denied); make the folder writable" in capsys.readouterr().err
