"""The file that `declare` writes: where, when, and never half."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.declaring import DeclareError, declare
from gatecheck.declaring.write import record_path, write

TEST = {"name": "exact test", "p": 0.02, "p_kind": "exact"}


def files(folder: Path) -> list[str]:
    return sorted(path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file())


def test_name_of_the_file(tmp_path: Path) -> None:
    made = declare(id="drainage/earthworm-biomass", test=TEST, folder=tmp_path)
    assert made.path == tmp_path / "drainage" / "earthworm-biomass.record.json"
    assert json.loads(made.path.read_text("utf-8")) == made.document
    assert files(tmp_path) == ["drainage/earthworm-biomass.record.json"]
    assert repr(made) == f"<record 'drainage/earthworm-biomass', in {made.path}>"


def test_folder_is_results_in_the_current_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    declare(id="worms", test=TEST)
    assert files(tmp_path) == ["results/worms.record.json"]


def test_without_folder_nothing_is_written(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    made = declare(id="worms", test=TEST, folder=None)
    assert made.path is None
    assert repr(made) == "<record 'worms', not written to a file>"
    assert files(tmp_path) == []


def test_bytes_of_the_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Two spaces, one line break at the end, letters as they are, floats in full."""
    monkeypatch.setattr("gatecheck.declaring.emit.software", lambda _: {"python": "3.11.7"})
    monkeypatch.setattr("gatecheck.declaring.emit.provenance", lambda *_: {})
    made = declare(id="würmer", test={"p": 0.1 + 0.2}, folder=tmp_path)
    assert made.path is not None
    assert made.path.read_bytes().decode() == (
        '{\n  "gatecheck": "record/1",\n  "id": "würmer",\n  "status": "exploratory",\n'
        '  "test": {\n    "p": 0.30000000000000004\n  },\n'
        '  "provenance": {\n    "software": {\n      "python": "3.11.7"\n    }\n  }\n}\n'
    )


def test_two_runs_give_the_same_bytes(tmp_path: Path) -> None:
    script = tmp_path / "analysis.py"
    script.write_text(
        "from scipy import stats\n"
        "from gatecheck.declaring import declare\n"
        "import sys\n"
        "x, y = [21.1, 18.4, 25.0, 22.2], [16.9, 17.7, 14.2, 18.8]\n"
        "declare(stats.ttest_ind(x, y), id='worms', tags=['soil', 'field'], folder=sys.argv[1],\n"
        "        sample={'unit': 'plot', 'groups': {'drained': x, 'undrained': y}})\n",
        encoding="utf-8",
    )
    written = []
    for seed, folder in (("1", "first"), ("2", "second")):
        environment = os.environ | {"PYTHONHASHSEED": seed}
        subprocess.run([sys.executable, script, folder], cwd=tmp_path, env=environment, check=True)
        written.append((tmp_path / folder / "worms.record.json").read_bytes())
    assert written[0] == written[1]
    assert json.loads(written[0])["provenance"]["code"] == "analysis.py"


def test_same_content_leaves_the_file_untouched(tmp_path: Path) -> None:
    made = declare(id="worms", test=TEST, folder=tmp_path)
    assert made.path is not None
    os.utime(made.path, ns=(1, 1))
    declare(id="worms", test=TEST, folder=tmp_path)
    assert made.path.stat().st_mtime_ns == 1
    declare(id="worms", test=TEST | {"p": 0.03}, folder=tmp_path)
    assert made.path.stat().st_mtime_ns != 1
    assert json.loads(made.path.read_bytes())["test"]["p"] == 0.03


def test_new_commit_or_time_alone_leaves_the_file_untouched(tmp_path: Path) -> None:
    """The same numbers would otherwise be rewritten with every commit, the one that adds them first."""
    path = tmp_path / "worms.record.json"
    first = {"id": "worms", "provenance": {"code": "a.py", "commit": "1" * 40, "made_at": "then"}}
    second = {"id": "worms", "provenance": {"code": "a.py", "commit": "2" * 40}}
    other = {"id": "worms", "provenance": {"code": "b.py", "commit": "2" * 40}}
    assert write(first, path) == first
    assert write(second, path) == first
    assert json.loads(path.read_bytes()) == first
    assert write(other, path) == other
    assert json.loads(path.read_bytes()) == other


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"\xff",
        b"{",
        b"[" * 100_000,
        b"[1]",
        b'{"id": "worms", "provenance": 3}',
        b'{"id": "worms", "harm": 1}',
    ],
)
def test_anything_else_in_its_place_is_replaced(content: bytes, tmp_path: Path) -> None:
    path = tmp_path / "worms.record.json"
    path.write_bytes(content)
    document = {"id": "worms", "harm": True}
    assert write(document, path) == document
    assert json.loads(path.read_bytes()) == document


def test_no_half_file_when_serialisation_fails(tmp_path: Path) -> None:
    path = tmp_path / "worms.record.json"
    write({"id": "worms"}, path)
    with pytest.raises(TypeError, match="not JSON serializable"):
        write({"id": "worms", "test": object()}, path)
    with pytest.raises(ValueError, match="not JSON compliant"):
        write({"id": "worms", "test": float("nan")}, path)
    assert path.read_text("utf-8") == '{\n  "id": "worms"\n}\n'
    assert files(tmp_path) == ["worms.record.json"]


def test_no_half_file_when_the_disk_fails(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "worms.record.json"
    write({"id": "worms"}, path)

    def full(*_: Any) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "replace", full)
    with pytest.raises(DeclareError) as caught:
        write({"id": "worms", "harm": True}, path)
    assert str(caught.value) == f"{path} cannot be written: No space left on device"
    assert path.read_text("utf-8") == '{\n  "id": "worms"\n}\n'
    assert files(tmp_path) == ["worms.record.json"]


def test_folder_that_is_a_file_is_told(tmp_path: Path) -> None:
    (tmp_path / "results").write_text("not a folder", encoding="utf-8")
    with pytest.raises(
        DeclareError, match=r"worms\.record\.json cannot be written: (Not a directory|File exists)$"
    ):
        declare(id="worms", test=TEST, folder=tmp_path / "results")


def test_faulty_record_is_never_written(tmp_path: Path) -> None:
    with pytest.raises(DeclareError, match=r"test\.p is 2, outside its range: "):
        declare(id="worms", test={"p": 2}, folder=tmp_path)
    assert files(tmp_path) == []


@pytest.mark.parametrize(
    ("name", "part"),
    [
        ("../worms", ".."),
        ("soil/../../worms", ".."),
        ("/etc/worms", ""),
        ("soil//worms", ""),
        ("soil/", ""),
        ("./worms", "."),
        (".git/worms", ".git"),
        ("worms.", "worms."),
        ("soil\\worms", "soil\\worms"),
        ("C:worms", "C:worms"),
        ("worms?", "worms?"),
        ("worms*", "worms*"),
        ("<worms>", "<worms>"),
        ('"worms"', '"worms"'),
        ("a|b", "a|b"),
        ("soil/NUL", "NUL"),
        ("com1.txt", "com1.txt"),
    ],
)
def test_hostile_ids(name: str, part: str, tmp_path: Path) -> None:
    with pytest.raises(DeclareError) as caught:
        declare(id=name, test=TEST, folder=tmp_path / "results")
    assert str(caught.value) == (
        f"id {name!r} makes no file name, because of the part {part!r}: use words that neither begin nor end with "
        'a dot, without < > : " \\ | ? *, with single slashes between them'
    )
    assert files(tmp_path) == []


@pytest.mark.parametrize("name", ["ü" * 120, "ü" * 127 + "/worms"])
def test_ids_too_long_for_a_file_name(name: str) -> None:
    with pytest.raises(DeclareError) as caught:
        record_path("results", name)
    message = f"id {name!r} is too long for a file name: shorten it, or divide it with slashes"
    assert str(caught.value) == message


@pytest.mark.parametrize("name", ["con", "Aux.x", "lpt9"])
def test_reserved_names(name: str) -> None:
    with pytest.raises(DeclareError, match="makes no file name"):
        record_path("results", name)


def test_names_that_only_resemble_reserved_ones() -> None:
    assert record_path("results", "console/v1.2/H1") == Path("results/console/v1.2/H1.record.json")


@given(st.text(st.sampled_from("ab./\\: \x00ü"), max_size=12))
def test_path_stays_in_its_folder(name: str) -> None:
    try:
        path = record_path("results", name)
    except DeclareError as error:
        assert str(error).startswith(f"id {name!r} ")  # noqa: PT017  # both outcomes are right, each for its names
        return
    assert Path(os.path.normpath(path)).parts[0] == "results"
    assert path.as_posix() == f"results/{name}.record.json"
