"""The display of a record, in a real kernel and piece by piece."""

from __future__ import annotations

import html.parser
import sys
from types import SimpleNamespace
from typing import Any

import nbformat
import pytest
from nbconvert.preprocessors import ExecutePreprocessor

from gatecheck.declaring import declare
from gatecheck.declaring.notebook import MEDIA_TYPE, bundle
from gatecheck.schema.records import read_record

# Neither of the two says its types.
FORMAT: Any = nbformat.v4
EXECUTOR: Any = ExecutePreprocessor
SOURCE = """
from scipy import stats
from gatecheck.declaring import declare
x, y = [21.1, 18.4, 25.0, 22.2], [16.9, 17.7, 14.2, 18.8]
declare(stats.ttest_ind(x, y), id="worms", claim="More <b>worms</b> & more.", estimate={"unit": "g/m2"},
        sample={"unit": "plot", "groups": {"drained": x, "undrained": y}})
"""


@pytest.mark.filterwarnings("default")  # the kernel's client warns of its own transport and event loop
def test_record_in_an_executed_notebook(tmp_path: Any) -> None:
    notebook = FORMAT.new_notebook(cells=[FORMAT.new_code_cell(SOURCE)])
    EXECUTOR(timeout=60, kernel_name="python3").preprocess(notebook, {"metadata": {"path": str(tmp_path)}})
    display, result = notebook.cells[0].outputs
    record, faults = read_record(display.data[MEDIA_TYPE])
    assert faults == ()
    assert record is not None
    assert record.claim == "More <b>worms</b> & more."
    assert record.test is not None
    assert record.test.value is not None
    assert record.test.value.value == pytest.approx(4.775 / (33.9275 / 6 / 2) ** 0.5, rel=1e-12)
    assert "More &lt;b&gt;worms&lt;/b&gt; &amp; more." in display.data["text/html"]
    assert display.data["text/plain"].splitlines()[0] == "record    worms"
    assert result.data["text/plain"] == "<record 'worms', in results/worms.record.json>"
    assert (tmp_path / "results" / "worms.record.json").is_file()


class _Cells(html.parser.HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.tags: set[str] = set()
        self.texts: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        assert attrs in ([], [("style", "text-align:left")])
        self.tags.add(tag)

    def handle_data(self, data: str) -> None:
        self.texts.append(data)


def rows(document: dict[str, Any]) -> dict[str, str]:
    """Return the rows of the table as the HTML shows them, after checking that the text shows the same."""
    shown = bundle({"id": "worms", "status": "exploratory", **document})
    cells = _Cells()
    cells.feed(shown["text/html"])
    assert cells.tags == {"table", "tr", "th", "td"}
    table = dict(zip(cells.texts[::2], cells.texts[1::2], strict=True))
    width = max(map(len, table))
    assert shown["text/plain"] == "\n".join(f"{label:<{width}}  {text}" for label, text in table.items())
    return table


def test_rows_of_a_full_record() -> None:
    document = {
        "claim": "Drained plots hold more earthworms.",
        "test": {"name": "two-sample t", "statistic": "t", "value": 2.2106, "df": 34, "p": "0.034"},
        "estimate": {
            "measure": "mean difference",
            "value": 4.2,
            "unit": "g/m2",
            "interval": {"level": 0.95, "low": 0.34, "high": 8.06},
        },
        "sample": {"unit": "plot", "n": 36},
    }
    assert rows(document) == {
        "record": "worms",
        "claim": "Drained plots hold more earthworms.",
        "status": "exploratory",
        "test": "two-sample t, t(34) = 2.211, p = 0.034",
        "estimate": "mean difference 4.2 g/m2, 95 % interval 0.34 to 8.06",
        "sample": "n = 36, unit: plot",
    }


@pytest.mark.parametrize(
    ("test", "shown"),
    [
        ({"statistic": "F", "value": 4.846, "df": [2, 27], "p": 0.01590995}, "F(2, 27) = 4.846, p = 0.01591"),
        ({"named_statistic": {"symbol": "U", "value": 35}, "p": "<0.001"}, "U = 35, p <0.001"),
        ({"name": "exact test", "p": 1e-12}, "exact test, p = 1e-12"),
        ({"statistic": "z", "value": 0.0}, "z = 0"),
    ],
)
def test_row_of_a_test(test: dict[str, Any], shown: str) -> None:
    assert rows({"test": test})["test"] == shown


@pytest.mark.parametrize(
    ("estimate", "shown"),
    [
        ({"measure": "r", "value": 0.5, "unit": "1"}, "r 0.5"),
        ({"measure": "r", "value": 0.5, "interval": {"level": 0.9, "low": 0.1}}, "r 0.5, 90 % interval 0.1 to inf"),
        ({"measure": "r", "value": 0.5, "interval": {"level": 0.9, "high": 0}}, "r 0.5, 90 % interval -inf to 0"),
    ],
)
def test_row_of_an_estimate(estimate: dict[str, Any], shown: str) -> None:
    assert rows({"estimate": estimate})["estimate"] == shown


def test_rows_of_a_bare_record() -> None:
    assert rows({"sample": {"n": 3}}) == {
        "record": "worms",
        "claim": "(nothing is claimed)",
        "status": "exploratory",
        "sample": "n = 3",
    }


def test_hostile_text_stays_text() -> None:
    hostile = "</td><script>alert('x')</script>&amp;\""
    assert rows({"claim": hostile, "test": {"name": hostile}})["claim"] == hostile


@pytest.mark.parametrize("shell", [None, SimpleNamespace()])
def test_no_display_outside_a_kernel(shell: object, monkeypatch: pytest.MonkeyPatch, capsys: Any) -> None:
    """A plain interpreter has no shell, and the shell of a terminal has no kernel."""
    monkeypatch.setitem(sys.modules, "IPython", SimpleNamespace(get_ipython=lambda: shell))
    declare(id="worms", test={"p": 0.5}, folder=None)
    assert capsys.readouterr() == ("", "")


def test_display_in_a_kernel(monkeypatch: pytest.MonkeyPatch) -> None:
    published: list[Any] = []
    publisher = SimpleNamespace(publish=lambda *, data: published.append(data))
    shell = SimpleNamespace(kernel=object(), display_pub=publisher)
    monkeypatch.setitem(sys.modules, "IPython", SimpleNamespace(get_ipython=lambda: shell))
    made = declare(id="worms", test={"p": 0.5}, folder=None)
    assert [data[MEDIA_TYPE] for data in published] == [made.document]
