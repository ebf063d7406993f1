"""The line that tells how far long work has come."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Callable
from io import StringIO
from pathlib import Path

import pytest
from support import drainage, git, write_tree

from gatecheck.commands import edge
from gatecheck.commands.progress import EVERY, FIRST, ProgressLine
from gatecheck.gate import Request, check
from gatecheck.scan import scan

pty = pytest.importorskip("pty")

ROOT = Path(edge.__file__).parents[2]
READING = "Reading {:,} of {:,} files"
#: In seconds, for what takes a moment and may take long on a busy machine.
PATIENCE = 20.0


def wait_until(is_so: Callable[[], bool]) -> None:
    end = time.monotonic() + PATIENCE
    while not is_so() and time.monotonic() < end:
        time.sleep(0.001)
    assert is_so()


def screen(written: str, columns: int = 80) -> tuple[str, list[str]]:
    """The line that a terminal shows after `written`, and each that it showed before; it leaves no other."""
    line, shown = " " * columns, []
    for part in written.split("\r"):
        line = part + line[len(part) :]
        assert len(line) == columns
        assert len(part) < columns
        shown.append(line.rstrip())
    return line.rstrip(), shown


def test_it_shows_where_the_work_is_and_is_gone_at_the_end() -> None:
    stream = StringIO()
    with ProgressLine(stream, 80, 0.0, 0.001) as progress:
        progress(READING, 12_000, 20_000)
        wait_until(lambda: "12,000" in stream.getvalue())
        progress("Weighing {1:,} records", 0, 7)
        wait_until(lambda: "Weighing" in stream.getvalue())

    left, shown = screen(stream.getvalue())
    assert [line for line in shown if line] == ["Reading 12,000 of 20,000 files", "Weighing 7 records"]
    assert left == ""
    assert stream.getvalue().endswith("\r")


def test_short_work_shows_nothing() -> None:
    stream = StringIO()
    with ProgressLine(stream, 80) as progress:
        progress(READING, 1, 2)

    assert stream.getvalue() == ""
    assert (FIRST, EVERY) == (1.0, 0.1)


def test_work_that_says_nothing_shows_nothing() -> None:
    stream = StringIO()
    with ProgressLine(stream, 80, 0.0, 0.001):
        time.sleep(0.05)

    assert stream.getvalue() == ""


def test_what_has_not_changed_is_not_written_again() -> None:
    stream = StringIO()
    with ProgressLine(stream, 80, 0.0, 0.001) as progress:
        progress(READING, 1, 2)
        wait_until(lambda: stream.getvalue() != "")
        time.sleep(0.05)

    assert stream.getvalue().count("Reading") == 1


def test_it_is_written_no_more_often_than_it_should_be() -> None:
    stream = StringIO()
    begun = time.monotonic()
    with ProgressLine(stream, 80, 0.05, 0.05) as progress:
        for number in range(400):
            progress(READING, number, 400)
            time.sleep(0.001)
    passed = time.monotonic() - begun

    assert 1 <= stream.getvalue().count("Reading") <= passed / 0.05


def test_it_keeps_off_the_last_column() -> None:
    stream = StringIO()
    with ProgressLine(stream, 20, 0.0, 0.001) as progress:
        progress(READING, 12_000, 20_000)
        wait_until(lambda: stream.getvalue() != "")

    assert screen(stream.getvalue(), 20)[1][1] == "Reading 12,000 of 2"


def test_it_is_cleared_where_the_work_fails() -> None:
    stream = StringIO()

    def fail() -> None:
        with ProgressLine(stream, 80, 0.0, 0.001) as progress:
            progress(READING, 1, 2)
            wait_until(lambda: stream.getvalue() != "")
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        fail()
    assert screen(stream.getvalue())[0] == ""


def test_a_stream_that_has_gone_stops_no_work() -> None:
    tried = []

    class Gone(StringIO):
        def write(self, text: str) -> int:
            tried.append(text)
            raise BrokenPipeError

    with ProgressLine(Gone(), 80, 0.0, 0.001) as progress:
        progress(READING, 1, 2)
        wait_until(lambda: tried != [])

    assert tried == ["\rReading 1 of 2 files"]


def test_a_scan_tells_each_file_that_it_has_read(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage(), drainage(id="other"), policy=None)
    git(tmp_path, "init", "--quiet")
    told: list[tuple[str, int, int]] = []
    found = scan(tmp_path, ["**"], [], progress=lambda *at: told.append(at))

    assert told == [(READING, 1, 2), (READING, 2, 2)]
    assert [one.record.id for one in found.found] == [one.record.id for one in scan(tmp_path, ["**"], []).found]


@pytest.mark.parametrize(
    ("terminal", "environment", "shows"),
    [
        (True, {"TERM": "xterm"}, True),
        (True, {}, True),
        (True, {"TERM": "dumb"}, False),
        (True, {"TERM": "xterm", "CI": "1"}, False),
        (False, {"TERM": "xterm"}, False),
    ],
)
def test_where_it_is_shown(
    terminal: bool, environment: dict[str, str], shows: bool, monkeypatch: pytest.MonkeyPatch
) -> None:
    class Stream(StringIO):
        def isatty(self) -> bool:
            return terminal

        def fileno(self) -> int:
            return 2

    for name in ("TERM", "CI"):
        monkeypatch.delenv(name, raising=False)
    for name, value in environment.items():
        monkeypatch.setenv(name, value)
    monkeypatch.setattr(os, "get_terminal_size", lambda _: os.terminal_size((80, 24)))
    stream = Stream()
    monkeypatch.setattr(sys, "stderr", stream)
    with edge.progress() as progress:
        assert (progress is not None) is shows
    assert stream.getvalue() == ""


WORK = f"""
import time
from gatecheck.commands.edge import progress
with progress() as line:
    if line is None:
        print("nobody watches")
    else:
        end = time.monotonic() + 1.5
        while time.monotonic() < end:
            line({READING!r}, 1, 3)
            time.sleep(0.01)
print("done")
"""


#: The command with a line that is written at once and waits for nobody: each step is shown before the next begins.
SLOW_COMMAND = """
import sys, time
from gatecheck.commands import progress
class Slow(progress.ProgressLine):
    def __init__(self, stream, columns):
        super().__init__(stream, columns, 0.0, 0.001)
        self.seen = set()
    def __call__(self, sentence, done, of):
        super().__call__(sentence, done, of)
        if sentence not in self.seen:
            self.seen.add(sentence)
            time.sleep(0.3)
progress.ProgressLine = Slow
from gatecheck.cli import main
main(sys.argv[1:])
"""


def run_at_a_terminal(*arguments: str) -> tuple[str, str]:
    """What a program writes to standard output, a pipe, and to standard error, a terminal of its own."""
    ours, theirs = pty.openpty()
    environment = {name: value for name, value in os.environ.items() if name != "CI"}
    with subprocess.Popen(
        [sys.executable, *arguments],
        stdout=subprocess.PIPE,
        stderr=theirs,
        env={**environment, "TERM": "xterm", "PYTHONPATH": str(ROOT)},
    ) as process:
        os.close(theirs)
        output, _ = process.communicate()
    with os.fdopen(ours, "rb") as terminal:
        written = b""
        try:
            while part := terminal.read1():
                written += part
        except OSError:  # what Linux says where the other end is closed
            pass
    return output.decode(), written.decode()


def test_at_a_real_terminal() -> None:
    output, written = run_at_a_terminal("-c", WORK)

    assert output == "done\n"
    assert written.startswith("\rReading 1 of 3 files")
    assert written == f"\rReading 1 of 3 files\r{' ' * 20}\r"


def test_into_a_file() -> None:
    done = subprocess.run(
        [sys.executable, "-c", WORK],
        capture_output=True,
        text=True,
        check=True,
        env={**os.environ, "TERM": "xterm", "PYTHONPATH": str(ROOT)},
    )

    assert (done.stdout, done.stderr) == ("nobody watches\ndone\n", "")


def test_weighing_and_explaining_show_it_and_leave_no_trace(tmp_path: Path) -> None:
    many = [drainage(id=f"plot/{number}") for number in range(400)]
    write_tree(tmp_path, *many)
    for command in (["weigh", str(tmp_path)], ["explain", "plot/7", str(tmp_path)], ["survey", str(tmp_path)]):
        output, written = run_at_a_terminal("-c", SLOW_COMMAND, *command)
        assert "plot/7" in output
        assert "\x1b" not in output, "standard output is no terminal here"
        left, shown = screen(written)
        assert left == ""
        assert "Reading 1 of 401 files" in shown
        assert ("Judging 400 records" in shown) is (command[0] != "survey")


def test_a_base_is_read_too(tmp_path: Path) -> None:
    write_tree(tmp_path, drainage())
    git(tmp_path, "init", "--quiet")
    git(tmp_path, "add", ".")
    git(tmp_path, "commit", "--quiet", "--message=first")
    told: list[str] = []
    check(
        Request(tmp_path, base="HEAD", progress=lambda sentence, done, of: told.append(sentence.format(done, of)))
    )

    reading = ["Reading 1 of 2 files", "Reading 2 of 2 files"]
    judging = ["Weighing 1 records", "Judging 1 records", "Telling what came of 1 records"]
    assert told == [*reading, *reading, *judging]
