"""The command line: arguments in, streams and exit status out."""

from __future__ import annotations

import io
import json
import os
import re
import runpy
import subprocess
import sys
from pathlib import Path

import pytest
from support import POLICY, command, drainage, write_tree

from gatecheck import __version__, declare
from gatecheck.arguments import FORMATS, KINDS
from gatecheck.cli import main
from gatecheck.commands import edge
from gatecheck.declaring import declare as declared
from gatecheck.render import RENDERERS


def said(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    """The exit status and both streams of one call in this process."""
    status = main(arguments)
    streams = capsys.readouterr()
    return status, streams.out, streams.err


def test_the_account_is_readable_at_80_columns(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage())

    ran = command("weigh", str(tmp_path))

    assert (ran.returncode, ran.stderr) == (1, "")
    assert ran.stdout.startswith("Falls short of the policy: the only claim.")
    assert max(len(line) for line in ran.stdout.splitlines()) <= 80
    assert "\x1b" not in ran.stdout
    words = " ".join(ran.stdout.split())
    assert "29 plots per group would do" in words
    assert "local rules and licensed practice decide" in words


def test_the_current_folder_is_judged_where_none_is_named(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage(test__value=9.0, test__p="<0.001", estimate=...))

    ran = command("weigh", cwd=tmp_path)

    assert (ran.returncode, ran.stderr) == (0, "")


def test_reports_are_written_in_every_format_and_the_status_stays(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = tmp_path / "tree"
    folder.mkdir()
    write_tree(folder, drainage())
    writes = [f"--write={form}={tmp_path / form}" for form in FORMATS]

    status, out, err = said(capsys, "weigh", str(folder), *writes, "--write", "json=-")

    assert (status, err) == (1, "")
    assert out == (tmp_path / "json").read_text(encoding="utf-8")
    assert json.loads(out)["exit"] == 1
    assert (tmp_path / "summary").read_text(encoding="utf-8").count("drainage/earthworm-biomass") >= 1
    assert (tmp_path / "annotations").read_text(encoding="utf-8").startswith("::error file=r000.json,line=1,")


def test_the_formats_offered_are_those_that_there_are() -> None:
    assert set(FORMATS) == set(RENDERERS)


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (
            ["weigh", ".", "--write", "xml=a"],
            "--write takes FORMAT=PATH with a format of json, summary, annotations",
        ),
        (["weigh", ".", "--write", "json"], "not 'json'"),
        (["weigh", ".", "--write", "json="], "not 'json='"),
        (["weigh", ".", "--only-changed"], "--only-changed needs --base: say since which revision"),
    ],
)
def test_wrong_usage_is_told_and_exits_with_2(
    capsys: pytest.CaptureFixture[str], arguments: list[str], sentence: str
) -> None:
    status, out, err = said(capsys, *arguments)

    assert (status, out) == (2, "")
    assert err.startswith("gatecheck: ")
    assert sentence in err


@pytest.mark.parametrize("arguments", [[], ["judge"], ["weigh", "a", "b"], ["schema", "verdicts"]])
def test_what_the_command_does_not_know_exits_with_2(
    capsys: pytest.CaptureFixture[str], arguments: list[str]
) -> None:
    with pytest.raises(SystemExit, match="2"):
        main(arguments)

    assert capsys.readouterr().err.startswith("usage: gatecheck")


def test_a_report_that_cannot_be_written_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_tree(tmp_path, drainage())

    status, _, err = said(capsys, "weigh", str(tmp_path), "--write", f"json={tmp_path / 'no' / 'a.json'}")

    assert status == 2
    assert re.fullmatch(r"gatecheck: cannot write '.*/no/a\.json': No such file or directory\n", err)


def test_a_folder_that_is_not_there_cannot_be_judged(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status, out, _ = said(capsys, "weigh", str(tmp_path / "no"))
    assert status == 3
    assert "does not exist" in " ".join(out.split())

    status, _, err = said(capsys, "survey", str(tmp_path / "no"))
    assert (status, err.startswith("gatecheck: cannot judge: ")) == (3, True)


def test_survey_lists_records_and_what_cannot_be_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_tree(tmp_path, drainage(), drainage(id="b", claim=...), drainage(id="c", test__p=7))

    status, out, _ = said(capsys, "survey", str(tmp_path))

    assert status == 0
    assert "drainage/earthworm-biomass" in out
    assert "c: test.p is 7, outside its range" in " ".join(out.split())


def test_survey_needs_a_policy_that_can_be_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_tree(tmp_path, drainage(), policy={**POLICY, "rules": {"x": {}}})

    assert said(capsys, "survey", str(tmp_path)) == (
        3,
        "",
        "gatecheck: cannot judge: the policy cannot be read; see `gatecheck weigh` for what is wrong with it.\n",
    )


def test_explain_shows_all_reasoning_for_one_record(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Every alternative that the record allows, and words for the rules that are met too."""
    write_tree(tmp_path, drainage(), drainage(id="second"))

    status, out, _ = said(capsys, "explain", "drainage/earthworm-biomass", str(tmp_path))

    words = " ".join(out.split())
    assert status == 0
    assert "second" not in out
    assert "natural log 1.62" in words
    assert "natural log 1.34" in words  # against the planned effect of one SD, ratio 3.82
    assert "natural log 1.16" in words  # by the bound, ratio 3.20
    assert "compared: statistic, df, sides and p, estimate and interval" in words


def test_explain_needs_a_record_that_is_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_tree(tmp_path, drainage())

    status, _, err = said(capsys, "explain", "nö", str(tmp_path))
    assert (status, err) == (
        2,
        "gatecheck: there is no record 'n\\xf6'; `gatecheck survey` lists those that there are\n",
    )
    (tmp_path / "r000.json").write_text('{"gatecheck": "record/1",', encoding="utf-8")
    status, out, _ = said(capsys, "explain", "x", str(tmp_path))
    assert (status, out.startswith("Cannot judge")) == (3, True)


@pytest.mark.parametrize("kind", KINDS)
def test_schema_prints_the_published_schema(capsys: pytest.CaptureFixture[str], kind: str) -> None:
    status, out, _ = said(capsys, "schema", kind)

    assert (status, json.loads(out)["title"]) == (0, f"{kind}/1")


def test_an_interrupt_is_no_pass(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    def interrupted(_: object) -> int:
        raise KeyboardInterrupt

    monkeypatch.setattr("gatecheck.commands.survey.act", interrupted)

    assert said(capsys, "survey") == (3, "", "gatecheck: interrupted before it could judge.\n")


def test_a_reader_that_has_gone_is_no_traceback(tmp_path: Path) -> None:
    write_tree(tmp_path, *(drainage(id=f"r/{number}") for number in range(300)))
    read_end, write_end = os.pipe()
    os.close(read_end)

    ran = subprocess.run(
        [sys.executable, "-m", "gatecheck", "weigh", str(tmp_path)],
        stdout=write_end,
        stderr=subprocess.PIPE,
        check=False,
        env={**os.environ, "PYTHONPATH": str(Path(__file__).parents[1])},
    )
    os.close(write_end)

    assert (ran.returncode, ran.stderr) == (3, b"")


def test_the_width_follows_a_terminal_within_limits(monkeypatch: pytest.MonkeyPatch) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

        def fileno(self) -> int:
            return 1

    monkeypatch.setattr(sys, "stdout", Terminal())
    widths = []
    for columns in (20, 100, 300):
        monkeypatch.setattr(os, "get_terminal_size", lambda _, columns=columns: os.terminal_size((columns, 24)))
        widths.append(edge.width())

    assert widths == [40, 100, 140]


def test_the_module_runs_as_the_command(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(sys, "argv", ["gatecheck", "--version"])

    with pytest.raises(SystemExit, match="0"):
        runpy.run_module("gatecheck", run_name="__main__")

    assert capsys.readouterr().out == f"gatecheck {__version__}\n"


def test_analysis_code_imports_declare_from_the_root() -> None:
    import gatecheck  # noqa: PLC0415  # its attributes are what is tested

    assert declare is declared
    with pytest.raises(AttributeError, match="module 'gatecheck' has no attribute 'declares'"):
        _ = gatecheck.declares
