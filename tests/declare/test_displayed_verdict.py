"""What a notebook shows of the verdict beside a declared record."""

from __future__ import annotations

import html.parser
import json
import subprocess
import sys
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import nbformat
import numpy as np
import pytest
from nbconvert.preprocessors import ExecutePreprocessor
from support import POLICY, Document, changed, drainage, git, judge, weigh, write_tree

from gatecheck import displaying
from gatecheck.declaring import declare, notebook
from gatecheck.declaring.notebook import MEDIA_TYPE, Display
from gatecheck.displaying import BY_ITSELF, CLOSING, shown
from gatecheck.rules import NAMES
from gatecheck.scan import scan

FORMAT: Any = nbformat.v4
EXECUTOR: Any = ExecutePreprocessor
WRITTEN = Path("results/drainage/earthworm-biomass.record.json")


class _List(html.parser.HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.texts: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        assert attrs == []
        self.tags.append(tag)

    def handle_data(self, data: str) -> None:
        self.texts.append(data)


def rows(document: Document, folder: Path, written: Path | None = WRITTEN) -> list[tuple[str, str]]:
    """The rows of the display as the HTML has them, after checking that the text has the same."""
    marked, text = shown(document, folder, written)
    parts = _List()
    parts.feed(marked)
    pairs = list(zip(parts.texts[::2], parts.texts[1::2], strict=True))
    assert parts.tags == ["dl", *(["dt", "dd"] * len(pairs))]
    assert text.split() == " ".join(f"{label} {said}" for label, said in pairs).split()
    assert max(map(len, text.splitlines())) <= 100
    return pairs


def told(document: Document, folder: Path, written: Path | None = WRITTEN) -> dict[str, str]:
    """The rows by label; of several with one label the last."""
    return dict(rows(document, folder, written))


def test_a_record_that_falls_short(tmp_path: Path) -> None:
    shown_rows = rows(drainage(), write_tree(tmp_path))

    assert [label for label, _ in shown_rows] == ["verdict", "risk", "note", "why", "to mend", "policy", "in CI"]
    by_label = dict(shown_rows)
    assert by_label["verdict"] == "falls short of the policy"
    assert by_label["risk"] == (
        "false positive risk 17 % (prior 0.5, against the effect as observed); prior needed 79 %"
    )
    assert by_label["note"].startswith("errs in favour of the claim: ")
    assert "29 plots per group" in by_label["to mend"]
    assert by_label["policy"] == "field-station reporting policy (gatecheck.yaml)"
    assert by_label["in CI"] == CLOSING


def test_it_is_what_the_gate_says_of_the_same_record(tmp_path: Path) -> None:
    gate = judge(tmp_path, drainage())
    display = told(drainage(), tmp_path)

    claim = gate.claim()
    assert claim["verdict"] == "falls-short"
    assert display["why"] == f"False positive risk: {gate.rule('false-positive-risk')['message']}"
    assert display["to mend"] == gate.rule("false-positive-risk")["remedy"]


def test_a_record_that_meets_what_is_asked_of_it(tmp_path: Path) -> None:
    strong = changed(POLICY, rules={"false-positive-risk": {"limit": 0.2}})

    assert told(drainage(), write_tree(tmp_path, policy=strong))["verdict"] == (
        "meets what the policy asks of this record by itself"
    )


def test_a_result_without_a_claim(tmp_path: Path) -> None:
    assert told(drainage(claim=...), write_tree(tmp_path))["verdict"] == (
        "nothing is claimed; the result is only reported"
    )
    odd = told(drainage(claim=..., test__p="0.9"), tmp_path)
    assert odd["verdict"] == "falls short of the policy"
    assert odd["why"].startswith("Numbers agree: ")


def test_what_cannot_be_decided(tmp_path: Path) -> None:
    bare = drainage(test={"name": "a test of its own"}, estimate=..., sample={"unit": "plot", "n": 36})
    display = told(bare, write_tree(tmp_path))

    assert display["verdict"] == "cannot be decided"
    assert display["risk"] == "unknown"
    assert "the record gives neither a statistic nor a p-value" in display["why"]
    assert "note" not in display


def test_a_claim_of_no_effect_has_no_risk_of_an_effect(tmp_path: Path) -> None:
    equal = drainage(aim="equivalence", claim="The two hold as much biomass.", estimate__margin=[-9, 9])
    display = told(equal, write_tree(tmp_path))

    assert "risk" not in display
    assert display["verdict"] == "meets what the policy asks of this record by itself"


def test_what_the_policy_only_notes(tmp_path: Path) -> None:
    lenient = changed(POLICY, rules={"false-positive-risk": {"limit": 0.05, "enforce": "note"}})
    display = told(drainage(), write_tree(tmp_path, policy=lenient))

    assert display["verdict"] == "meets what the policy asks of this record by itself"
    assert display["noted only"].startswith("False positive risk: ")
    assert "29 plots per group" in display["to mend"]


def test_the_policy_is_the_nearest_above_up_to_the_top_of_the_repository(tmp_path: Path) -> None:
    outer, top = tmp_path, tmp_path / "station"
    folder = top / "notebooks" / "soil"
    folder.mkdir(parents=True)
    write_tree(outer)
    assert told(drainage(), folder)["policy"].startswith("built-in starting policy, as there is no gatecheck.yaml")
    git(top, "init", "--quiet")
    assert told(drainage(), folder)["policy"].startswith("built-in starting policy, ")
    write_tree(top, policy=changed(POLICY, name="of the station"))
    assert told(drainage(), folder)["policy"] == "of the station (../../gatecheck.yaml)"
    write_tree(folder, policy=changed(POLICY, name="of the soil group"))
    assert told(drainage(), folder)["policy"] == "of the soil group (gatecheck.yaml)"


def test_rules_that_need_more_than_the_record_are_left_open(tmp_path: Path) -> None:
    wide = changed(POLICY, rules={**POLICY["rules"], "family": {}, "wording": {}, "registered": {}})
    comparing = drainage(compares=["wet", "dry"])

    assert told(drainage(), write_tree(tmp_path, policy=wide))["left open"] == (
        "the policy also asks for family, registered, which needs more than this record."
    )
    assert "family, registered, wording," in told(comparing, tmp_path)["left open"]
    assert set(BY_ITSELF) < set(NAMES)


def test_a_policy_that_cannot_be_read(tmp_path: Path) -> None:
    display = rows(drainage(), write_tree(tmp_path, policy=changed(POLICY, rules={"false-positiv-risk": {}})))

    assert len(display) == 1
    label, text = display[0]
    assert label == "verdict"
    assert text.startswith(
        "cannot judge, as the policy cannot be read. gatecheck.yaml, line 1: "
        "rules.false-positiv-risk is no known rule."
    )


def test_a_policy_that_is_no_file(tmp_path: Path) -> None:
    (tmp_path / "gatecheck.yaml").mkdir()

    assert rows(drainage(), tmp_path) == [
        (
            "verdict",
            "cannot judge: gatecheck.yaml cannot be read (Is a directory). "
            "To mend: make it a file that can be read.",
        )
    ]


def test_a_file_that_the_gate_will_not_see(tmp_path: Path) -> None:
    narrow = changed(POLICY, scan={"include": ["results/**"], "exclude": ["**/draft/**"]})
    write_tree(tmp_path, policy=narrow)

    assert "file" not in told(drainage(), tmp_path)
    assert "file" not in told(drainage(), tmp_path, tmp_path / WRITTEN)
    assert told(drainage(), tmp_path, Path("results/draft/a.json"))["file"] == (
        "the policy does not name results/draft/a.json in its scan, so the gate will not see the record there."
    )
    assert told(drainage(), tmp_path, Path("out/a.json"))["file"].startswith("the policy does not name out/a.json")
    assert told(drainage(), tmp_path, Path("../a.json"))["file"] == (
        "the record lies outside of the folder of this policy, so it is not judged by it."
    )


def test_parts_of_the_policy_for_some_paths(tmp_path: Path) -> None:
    by_path = {"match": {"path": ["notebooks/**"]}, "rules": {"false-positive-risk": {"limit": 0.2}}}
    git(tmp_path, "init", "--quiet")
    write_tree(tmp_path, policy=changed(POLICY, **{"for": [by_path]}))
    in_notebook = drainage(provenance={"code": "notebooks/soil.ipynb"})

    assert told(drainage(), tmp_path, Path("notebooks/a.json"))["verdict"].startswith("meets ")
    assert told(in_notebook, tmp_path, None)["verdict"].startswith("meets ")
    assert "file" not in told(in_notebook, tmp_path, None)
    unknown = told(drainage(), tmp_path, None)
    assert unknown["verdict"] == "falls short of the policy"
    assert unknown["file"].startswith("the path of this notebook is not known here, ")
    write_tree(tmp_path)
    assert "file" not in told(drainage(), tmp_path, None)


def test_it_is_the_same_each_time_whatever_the_session_does_with_floating_point(tmp_path: Path) -> None:
    write_tree(tmp_path)
    with np.errstate(all="raise"):
        assert shown(drainage(), tmp_path, WRITTEN) == shown(drainage(), tmp_path, WRITTEN)


def test_hostile_text_stays_text(tmp_path: Path) -> None:
    hostile = "</dd><script>alert('x')</script>\x1b[31m"
    marked, text = shown(
        drainage(test__name=hostile), write_tree(tmp_path, policy=changed(POLICY, name=hostile)), None
    )

    assert "<script" not in marked
    assert "&lt;/dd&gt;&lt;script&gt;" in marked
    assert "\x1b" not in marked + text


def test_a_record_with_faults_is_none() -> None:
    with pytest.raises(ValueError, match="the record has faults"):
        shown(drainage(status="sure"), Path(), WRITTEN)


@pytest.fixture
def published(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> list[dict[str, Any]]:
    """What is published in a session that looks like a notebook's, in a folder with a policy."""
    outputs: list[dict[str, Any]] = []
    publisher = SimpleNamespace(publish=lambda *, data: outputs.append(data))
    shell = SimpleNamespace(kernel=object(), display_pub=publisher)
    monkeypatch.setitem(sys.modules, "IPython", SimpleNamespace(get_ipython=lambda: shell))
    monkeypatch.chdir(write_tree(tmp_path))
    return outputs


def test_the_display_of_a_declared_record(published: list[dict[str, Any]]) -> None:
    made = declare(id="worms", test={"p": 0.5})

    (data,) = published
    assert data[MEDIA_TYPE] == made.document
    assert data["text/html"].startswith("<table>")
    assert data["text/html"].count("<dl>") == 1
    record, verdict = data["text/plain"].split("\n\n")
    assert record.startswith("record  worms\n")
    assert verdict.startswith("verdict  ")
    assert "field-station reporting policy (gatecheck.yaml)" in verdict


def test_an_error_in_judging_stops_nothing(
    published: list[dict[str, Any]], monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object) -> None:
        raise ZeroDivisionError

    monkeypatch.setattr(displaying, "shown", broken)
    made = declare(id="worms", claim=None, test={"p": 0.5})

    (data,) = published
    sentence = (
        "What the gate will say could not be worked out here (ZeroDivisionError); "
        "`gatecheck explain worms` tells it."
    )
    assert data[MEDIA_TYPE] == made.document
    assert data["text/html"].endswith(f"</table><p>{sentence}</p>")
    assert data["text/plain"].endswith(f"\n\n{sentence}")


def test_a_gate_that_cannot_be_loaded_stops_nothing(
    published: list[dict[str, Any]], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(notebook, "_TELLER", "gatecheck.none")
    declare(id="worms", test={"p": 0.5})

    assert "could not be worked out here (ModuleNotFoundError)" in published[0]["text/plain"]


def test_what_only_the_display_loads_is_no_software_of_the_analysis(
    published: list[dict[str, Any]], monkeypatch: pytest.MonkeyPatch
) -> None:
    versions = {"python": "3.11", "numpy": "2", "scipy": "1"}
    display = Display()
    assert display.of_analysis(versions, None) == versions

    def load(*_: object) -> tuple[str, str]:
        monkeypatch.setitem(sys.modules, "scipy", SimpleNamespace())
        return "", ""

    monkeypatch.delitem(sys.modules, "scipy")
    monkeypatch.setattr(displaying, "shown", load)
    display.show(drainage(), WRITTEN)

    assert len(published) == 1
    assert display.of_analysis(versions, (2.1, 0.04)) == {"python": "3.11", "numpy": "2"}
    assert display.of_analysis(versions, SimpleNamespace()) == versions
    with_models = {**versions, "statsmodels": "0.14"}
    assert display.of_analysis(with_models, (2.1, 0.04)) == with_models


def test_outside_of_a_notebook_no_gate_is_loaded(tmp_path: Path) -> None:
    code = (
        "import sys; from gatecheck import declare; declare(id='worms', test={'p': 0.5}); "
        "print([name for name in ('gatecheck.displaying', 'gatecheck.rules', 'numpy') if name in sys.modules])"
    )
    root = str(Path(displaying.__file__).parents[1])
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=True,
        cwd=tmp_path,
        env={"PYTHONPATH": root, "PATH": ""},
    )

    assert done.stdout == "[]\n"


CELL = """
from gatecheck import declare
declare(id="worms", claim="More worms.", status="confirmatory", folder=None, sample={"unit": "plot", "n": 36},
        test={"name": "two-sample t", "statistic": "t", "value": 2.21, "df": 34, "p": "0.034", "sides": 2},
        estimate={"measure": "mean difference", "value": 4.2, "unit": "g/m2",
                  "interval": {"level": 0.95, "low": 0.34, "high": 8.06}})
"""


@pytest.mark.filterwarnings("default")  # the kernel's client warns of its own transport and event loop
def test_in_a_real_kernel_and_then_the_gate(tmp_path: Path) -> None:
    git(tmp_path, "init", "--quiet")
    folder = write_tree(tmp_path) / "notebooks"
    folder.mkdir()
    made = FORMAT.new_notebook(cells=[FORMAT.new_code_cell(CELL), FORMAT.new_code_cell(CELL)])
    EXECUTOR(timeout=60, kernel_name="python3").preprocess(made, {"metadata": {"path": str(folder)}})
    first, second = (cell.outputs[0].data for cell in made.cells)

    assert first == second, "the display leaves no trace in the next record"
    assert set(first[MEDIA_TYPE]["provenance"]["software"]) == {"python"}
    assert "\n\nverdict  falls short of the policy\n" in first["text/plain"]
    assert "field-station reporting policy (../gatecheck.yaml)" in first["text/plain"]
    assert "<dt>verdict</dt><dd>falls short of the policy</dd>" in first["text/html"]
    del made.cells[1]
    (folder / "soil.ipynb").write_text(json.dumps(made), encoding="utf-8")
    found = scan(tmp_path, ["**"], [])
    assert [one.record.id for one in found.found] == ["worms"]
    assert json.loads(json.dumps(found.found[0].document)) == first[MEDIA_TYPE]
    assert found.problems == ()
    assert weigh(tmp_path).claim("worms")["verdict"] == "falls-short"
