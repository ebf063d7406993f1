"""Code found in a tree: scripts, notebooks, R Markdown and Quarto, in the work tree or in a commit."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from analysis.reading import ALL, file_of, notebook, told
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats
from support import commit_all

from gatecheck.analysis import files, read_code
from gatecheck.analysis.catalogue import Language, libraries, names_of_tests

TEST = "from scipy import stats\nstats.ttest_ind(a, b)\n"


def cells(root: Path, content: str) -> list[str]:
    """The tests of a notebook, each with its cell."""
    file = file_of(root, "a.ipynb", content)
    return [f"{one.cell}: {text}" for one, text in zip(file.tests, told(file), strict=True)]


def test_cells_of_a_notebook_are_read_together(tmp_path: Path) -> None:
    content = notebook(
        "%matplotlib inline\nfrom scipy import stats\nx = !ls\nstats?",
        "%%time\nresult = stats.ttest_ind(a, b)\n?stats",
        "%%bash\nstats.wilcoxon(a)",
        "%%R -i d\nt.test(d)",
        "from gatecheck import declare\ndeclare(result, id='x')\nawait stats.kruskal(a)",
    )

    assert cells(tmp_path, content) == ["2: stats.ttest_ind 2 1 declared", "4: t.test 2 1", "5: stats.kruskal 3 1"]


def test_the_line_is_that_of_the_first_test_without_a_declaration(tmp_path: Path) -> None:
    content = notebook("from scipy import stats", "stats.ttest_ind(a, b)")

    line = file_of(tmp_path, "a.ipynb", content).line
    assert "stats.ttest_ind(a, b)" in content.splitlines()[line - 1]
    twice = notebook("from scipy import stats", "stats.ttest_ind(a, b)", "stats.ttest_ind(a, b)")
    line = file_of(tmp_path, "a.ipynb", twice).line
    assert (line, '"source"' in twice.splitlines()[line - 1]) == (11, True)
    declared = notebook(
        "from scipy import stats, gatecheck\nfrom gatecheck import declare", "declare(stats.wilcoxon(a))"
    )
    assert file_of(tmp_path, "b.ipynb", declared).line == 1


@pytest.mark.parametrize(
    "metadata",
    [
        {"language_info": {"name": "R"}},
        {"kernelspec": {"language": "R"}},
        {"kernelspec": {"name": "ir"}},
    ],
)
def test_a_notebook_of_r_is_read_as_r(tmp_path: Path, metadata: dict[str, dict[str, str]]) -> None:
    assert cells(tmp_path, notebook("x <- 1", "t.test(x)", **metadata)) == ["2: t.test 1 1"]


@pytest.mark.parametrize(
    ("content", "found"),
    [
        (notebook(TEST, language_info={"name": "julia"}), []),
        (notebook(TEST, language_info={"name": 3}, kernelspec=None), ["1: stats.ttest_ind 2 1"]),
        (
            json.dumps({"cells": [{"cell_type": "code", "source": TEST}], "metadata": "scipy"}),
            ["1: stats.ttest_ind 2 1"],
        ),
        (
            json.dumps({"worksheets": [{"cells": [{"cell_type": "code", "input": [TEST, 7]}]}, "scipy"]}),
            ["1: stats.ttest_ind 2 1"],
        ),
        (json.dumps({"cells": ["scipy", {"cell_type": "markdown", "source": TEST}, {"cell_type": "code"}]}), []),
        (json.dumps({"cells": "scipy"}), []),
        (json.dumps(["scipy"]), []),
        (notebook("import scipy", "a, b"), []),
        (notebook("!pip install scipy", "ttest_ind(a"), []),
        (notebook("%%Rscript", "%%Rust", "wilcoxon(a)"), []),
        (notebook("%%r", "%%R\nt.test(a)"), ["2: t.test 2 1"]),
    ],
)
def test_notebooks_of_any_shape_are_read(tmp_path: Path, content: str, found: list[str]) -> None:
    assert cells(tmp_path, content) == found


@pytest.mark.parametrize("content", [b'{"cells": "scipy"', b'"scipy \xff"', b'"scipy"' + b"[" * 100_000])
def test_what_is_no_notebook_is_told(tmp_path: Path, content: bytes) -> None:
    (why,) = file_of(tmp_path, "a.ipynb", content).not_read

    assert why.why == "the file is no notebook: its JSON cannot be parsed"


def test_a_cell_that_cannot_be_read_leaves_the_others(tmp_path: Path) -> None:
    file = file_of(tmp_path, "a.ipynb", notebook(TEST, "x = 1\nstats.wilcoxon(a", "%%R\nt.test(a"))

    assert told(file) == ["stats.ttest_ind 2 1"]
    assert [(each.why, each.line, each.cell) for each in file.not_read] == [
        ("the code is not Python as this version knows it", 2, 2),
        ("the code has a bracket that is not closed", 2, 3),
    ]


def test_cells_that_are_nested_too_deep_are_told(tmp_path: Path) -> None:
    deep = "x = stats.wilcoxon" + ".a(1)" * 400
    together = notebook("from scipy import stats\nstats.ttest_ind(a, b)", deep)

    file = file_of(tmp_path, "a.ipynb", together)
    assert file.tests == ()
    assert [each.why for each in file.not_read] == ["the code is nested too deep to be read"]


def test_cells_that_name_no_test_are_read_where_they_matter(tmp_path: Path) -> None:
    content = notebook(
        "from scipy.stats import ttest_ind as test\nfrom gatecheck import declare as tell",
        "names = ['a', 'b', 'c']",
        "result = test(a, b)",
        "kept = result\nprint 'this cell is broken'",
        "final = result",
        "last = final",
        "tell(last, id='x')",
        "def both(x): return test(x, x)",
        "both(1); both(2)",
        "for name in names: test(name)",
        "magic -> nothing",
    )

    file = file_of(tmp_path, "a.ipynb", content)
    assert [text.split()[1:] for text in told(file)] == [["1", "1", "declared"], ["1", "2"], ["1", "3"]]
    assert file.not_read == ()
    broken = file_of(
        tmp_path, "b.ipynb", notebook("import scipy\nprint 'x'", "wilcoxon()", "ttest_ind = scipy.stats.x")
    )
    assert (broken.tests, broken.not_read) == ((), ())


MARKDOWN = """---
title: scipy
---
t.test(a)

```{r setup, include = FALSE}
library(coin)
```
```r
t.test(shown)
```
```{python}
from scipy import stats
stats.ttest_ind(a, b)
```
~~~~{r, eval=FALSE}
t.test(off)
~~~~
```{r}
#| eval: false
t.test(off)
```
> ```{r}
t.test(a)
> ```
```{r}
wilcox.test(open)
"""


def test_chunks_of_markdown_are_read(tmp_path: Path) -> None:
    for name in ("a.Rmd", "b.qmd"):
        file = file_of(tmp_path, name, MARKDOWN)
        assert told(file) == ["stats.ttest_ind 14 1", "t.test 24 1", "wilcox.test 27 1"]
        assert file.line == 14
    assert file_of(tmp_path, "c.Rmd", "Nothing.\n").tests == ()
    broken = file_of(tmp_path, "d.qmd", "A\n```{python}\nimport scipy\nttest_ind(\n```\n")
    assert [(each.line, each.cell) for each in broken.not_read] == [(4, None)]


def test_globs_name_what_is_read(tmp_path: Path) -> None:
    for name in ("analysis/a.py", "tests/b.py", "analysis/tests/c.py", "analysis/d.txt", "e.R"):
        (tmp_path / name).parent.mkdir(exist_ok=True, parents=True)
        (tmp_path / name).write_text(TEST + "t.test(a)\n")

    read = read_code(tmp_path, ALL, ("**/tests/**",))

    assert [one.path for one in read.files] == ["analysis/a.py", "e.R"]
    assert [one.path for one in read_code(tmp_path, ("**/*.R",), ()).files] == ["e.R"]
    assert {"t", "Mann-Whitney"} <= read.names


def test_a_commit_is_read_as_it_was(tmp_path: Path) -> None:
    (tmp_path / "a.py").write_text(TEST)
    commit = commit_all(tmp_path, "code")
    (tmp_path / "a.py").write_text("\n" + TEST)

    assert told(read_code(tmp_path, ALL, (), commit).files[0]) == ["stats.ttest_ind 2 1"]
    assert told(read_code(tmp_path, ALL, ()).files[0]) == ["stats.ttest_ind 3 1"]


def test_what_has_no_content_is_told(tmp_path: Path) -> None:
    (tmp_path / "a.py").write_text(TEST)
    commit_all(tmp_path, "code")
    (tmp_path / "a.py").unlink()
    assert read_code(tmp_path, ALL, ()).files == ()
    (tmp_path / "a.py").symlink_to("elsewhere.py")

    (file,) = read_code(tmp_path, ALL, ()).files
    assert [each.why for each in file.not_read] == ["the file is a link that is not followed"]


def test_code_that_is_too_long_is_told(tmp_path: Path) -> None:
    long = TEST + "#" * files.LONGEST_CODE

    (script,) = file_of(tmp_path, "a.py", long).not_read
    assert script.why == "the file has 512 KiB, and is read up to 512 KiB"
    (cell,) = file_of(tmp_path, "a.ipynb", notebook(long)).not_read
    assert cell.why == "the code has 512 KiB, and is read up to 512 KiB"


@pytest.mark.parametrize("language", ["python", "r"])
def test_the_lists_hold_together(language: Language) -> None:
    for library in libraries(language):
        kinds = {known.kind for known in library.functions.values()}
        assert kinds, library.prefix
        for name, known in library.functions.items():
            assert name == name.strip()
            assert known.test is None or known.test in names_of_tests()
        assert library.frame_methods <= set(library.functions)


def test_what_the_lists_call_a_function_is_one() -> None:
    """Of scipy, which is there; names that only some versions have are few."""
    (scipy,) = (each for each in libraries("python") if each.prefix == "scipy.stats")
    absent = {name for name in scipy.functions if not hasattr(stats, name)}
    assert absent <= {
        "binom_test",
        "ttest_onesamp",
        "kruskalwallis",
        "spearmanrho",
        "bws_test",
        "quantile_test",
        "chatterjeexi",
        "logrank",
    }


_WORDS = [
    "from scipy import stats\n", "stats.ttest_ind", "t.test", "lm", "summary", "declare", "for", "in", "if", "else",
    "function", "(", ")", "{", "}", "[", "]", ",", "=", "<-", "->", "\n", "    ", "x", "'", '"', "\\", "|>", "$",
    "~", ":", "```{r}\n", "```", "import", "def f", "lambda", "1", "id", "c", "sapply", "while", "return", "\0",
    "ä",
]  # fmt: skip


@given(
    words=st.lists(st.sampled_from(_WORDS), max_size=40), suffix=st.sampled_from([".py", ".R", ".Rmd", ".ipynb"])
)
def test_any_words_are_survived(tmp_path_factory: pytest.TempPathFactory, words: list[str], suffix: str) -> None:
    text = f"scipy lm ttest_ind\n{''.join(words)}" if suffix == ".R" else "".join(["import scipy\n", *words])
    content = notebook(text, "%%R\n" + text) if suffix == ".ipynb" else text

    file = file_of(tmp_path_factory.mktemp("words"), f"any{suffix}", content.encode())

    assert all(each.known >= 0 and each.line >= 1 for each in file.tests)
    assert all(each.why.startswith("the code ") and each.line >= 1 for each in file.not_read)
