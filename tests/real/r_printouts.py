"""What R prints for its own documented examples, copied into records as a person copies from a printout."""

from __future__ import annotations

import functools
import json
import re
import subprocess
from collections.abc import Iterator
from decimal import ROUND_HALF_EVEN, Decimal
from pathlib import Path
from typing import Any

from real.material import Case, record
from support import Document

SCRIPT = Path(__file__).parent / "documented.R"
_FIGURE = re.compile(r"(?P<name>[A-Za-z][\w' .-]*?) (?P<relation>[=<]) (?P<value>-?[\d.]+(?:e[+-]?\d+)?)(?=,|$)")
_LEVEL = re.compile(r"^(?P<level>[\d.]+) percent confidence interval:$")
_RESIDUAL_DF = re.compile(r"standard error: .* on (?P<df>\d+) degrees of freedom$")
_STATISTICS = {"t": "t", "X-squared": "chi2", "Mantel-Haenszel X-squared": "chi2", "McNemar's chi-squared": "chi2",
               "F": "F", "Kruskal-Wallis chi-squared": "chi2", "Bartlett's K-squared": "chi2",
               "Fligner-Killeen:med chi-squared": "chi2", "z": "z"}  # fmt: skip
_NOT_P = {"df", "num df", "denom df", "p-value"}
_EXACT = re.compile(r"exact", re.IGNORECASE)


@functools.cache
def printed_by_r() -> tuple[Case, ...]:
    """Run R's examples, and return a case for every test and every term of a model that is printed."""
    command = ["Rscript", "--vanilla", str(SCRIPT)]
    told = json.loads(subprocess.run(command, check=True, capture_output=True, text=True).stdout)
    return tuple(case for entry in told for case in _cases(entry))


def _cases(entry: Document) -> Iterator[Case]:
    lines = entry["lines"]
    if "limits" in entry:
        yield from _of_model(entry)
    elif any("Pr(>F)" in line for line in lines):
        yield from _of_anova(entry)
    elif any("p adj" in line for line in lines):
        yield from _of_tukey(entry)
    else:
        yield _of_test(entry)


def _of_test(entry: Document) -> Case:
    lines = [line.strip() for line in entry["lines"] if line.strip()]
    method = lines[0]
    figures = {found["name"]: found for line in lines[1:4] for found in _FIGURE.finditer(line)}
    test: Document = {"name": method, "p": _p(figures["p-value"])}
    symbol = next((name for name in figures if name not in _NOT_P), None)
    alternative = next((line for line in lines if line.startswith("alternative hypothesis:")), "")
    # An F with an alternative is a ratio of variances, whose p is no upper tail.
    if symbol in _STATISTICS and not (symbol == "F" and alternative):
        test |= {"statistic": _STATISTICS[symbol], "value": figures[symbol]["value"], **_df(figures)}
    elif symbol is not None and "trials" not in figures:
        test |= {"named_statistic": {"symbol": symbol, "value": figures[symbol]["value"]}}
    if _EXACT.search(method) and "Wilcoxon" not in method:
        test["p_kind"] = "exact"
    if test.get("statistic") == "t":
        test |= _sides(alternative)
    estimate = _estimate(lines, test)
    parts = {"test": test, "sample": _sample(entry)} | ({"estimate": estimate} if estimate else {})
    several = test.get("statistic") in {"F", "chi2"} and Decimal(str(_first(test["df"]))) > 1
    whole = "interval" in estimate if estimate else several
    in_full = whole and ("n" in parts["sample"] or "groups" in parts["sample"])
    return Case(_kind(method), f"R, {entry['page']}", record(f"r/{entry['id']}", **parts), in_full)


def _kind(method: str) -> str:
    return re.sub(r"\s+with(?:out)? .*|\d+-sample ", "", method)


def _first(df: Any) -> Any:
    return df[0] if isinstance(df, list) else df


def _p(found: re.Match[str]) -> str:
    return found["value"] if found["relation"] == "=" else f"<{found['value']}"


def _df(figures: dict[str, re.Match[str]]) -> Document:
    if "num df" in figures:
        return {"df": [_whole(figures["num df"]["value"]), figures["denom df"]["value"]]}
    return {"df": figures["df"]["value"]} if "df" in figures else {}


def _whole(text: str) -> str:
    """R pads whole degrees of freedom to those beside them, as in 1.000."""
    return re.sub(r"\.0+$", "", text)


def _sides(alternative: str) -> Document:
    for word in ("greater", "less"):
        if f" {word} than " in alternative:
            return {"sides": 1, "tail": word}
    return {"sides": 2}


def _estimate(lines: list[str], test: Document) -> Document:
    if "sample estimates:" not in lines:
        return {}
    at = lines.index("sample estimates:")
    values = lines[at + 2].split()
    names = lines[at + 1]
    if len(values) > 2 or (len(values) == 1 and names.split()[0] in {"rho", "tau"}):
        return {}
    estimate: Document = {"value": values[0], "unit": "1"}
    if len(values) == 2:
        estimate |= {"measure": "difference in proportions" if "prop" in names else "mean difference",
                     "value": _difference(*values)}  # fmt: skip
    else:
        estimate |= _measured(names.strip(), lines)
    level = next((found for line in lines if (found := _LEVEL.match(line))), None)
    if level:
        low, high = lines[lines.index(level[0]) + 1].split()
        ends = {key: end for key, end in (("low", low), ("high", high)) if "Inf" not in end}
        ends = _without_end_of_scale(ends, estimate["measure"], test)
        estimate["interval"] = {"level": float(level["level"]) / 100, **ends}
    return estimate


def _without_end_of_scale(ends: Document, measure: str, test: Document) -> Document:
    """A one-sided exact interval ends at 0, which is no limit."""
    bare = measure == "odds ratio" and test.get("p_kind") == "exact"
    return {key: end for key, end in ends.items() if not (bare and Decimal(end) == 0)}


def _difference(first: str, second: str) -> str:
    """The difference of two printed numbers; of long ones without the last place, which it does not tell."""
    difference = Decimal(first) - Decimal(second)
    places = -int(difference.as_tuple().exponent)
    if places < 5:
        return str(difference)
    return str(difference.quantize(Decimal(1).scaleb(1 - places), ROUND_HALF_EVEN))


def _measured(name: str, lines: list[str]) -> Document:
    null = next(
        (re.search(r"equal to (-?[\d.]+)$", line) for line in lines if line.startswith("alternative")), None
    )
    if "odds ratio" in name:
        return {"measure": "odds ratio", "null": 1, "scale": "log"}
    if "ratio" in name or "rate" in name:
        return {"measure": name, "null": 1, "scale": "log"}
    if name == "cor":
        return {"measure": "Pearson correlation"}
    return {"measure": name} | ({"null": float(null[1])} if null else {})


def _sample(entry: Document) -> Document:
    sample: Document = {"unit": entry["unit"]}
    groups = entry.get("groups")
    if groups:
        named = (
            groups.items()
            if isinstance(groups, dict)
            else ((f"group {at}", each) for at, each in enumerate(groups, 1))
        )
        sample["groups"] = [{"name": name, **each} for name, each in named]
    if "n" in entry:
        sample["n"] = entry["n"]
    if "split" in entry:
        sample["planned_split"] = entry["split"]
    return sample


def _columns(line: str, figures: int) -> list[str]:
    """The name and the figures of a row of a table of R, without the stars, with `< 2e-16` as one."""
    return re.sub(r"<\s", "<", re.sub(r"\s(?:[*]{1,3}|[.])?\s*$", "", line)).rsplit(None, figures)


def _of_model(entry: Document) -> Iterator[Case]:
    lines = entry["lines"]
    start = next(at for at, line in enumerate(lines) if line.startswith("Coefficients:")) + 1
    residual = next((found for line in lines if (found := _RESIDUAL_DF.search(line))), None)
    statistic = "t" if "t value" in lines[start] else "z"
    limits = {row[0]: row[1:] for line in entry["limits"] if len(row := line.rsplit(None, 2)) == 3}
    for line in lines[start + 1 :]:
        if not line or line.startswith("---"):
            return
        name, value, error, ratio, p = _columns(line, 4)
        df = {"df": int(residual["df"])} if residual and statistic == "t" else {}
        test = {"name": f"{statistic} test of a coefficient", "statistic": statistic, "value": ratio, **df, "p": p}
        low, high = limits[name]
        estimate = {
            "measure": f"coefficient of {name}", "value": value, "unit": "1", "standard_error": error,
            "interval": {"level": 0.95, "low": low, "high": high},
        }  # fmt: skip
        identifier = f"r/{entry['id']}/{_safe(name)}"
        yield Case(
            "coefficient of lm" if statistic == "t" else "coefficient of glm",
            f"R, {entry['page']}",
            record(identifier, test=test, estimate=estimate, sample=_sample(entry)),
            in_full=True,
        )


def _of_anova(entry: Document) -> Iterator[Case]:
    start = next(at for at, line in enumerate(entry["lines"]) if "Pr(>F)" in line) + 1
    residual = next(at for at, line in enumerate(entry["lines"]) if line.startswith("Residuals"))
    rows = [_columns(line, 5) for line in entry["lines"][start:residual]]
    df_of_error = int(entry["lines"][residual].split()[1])
    test_name = "one-way analysis of variance" if len(rows) == 1 else "analysis of variance"
    for name, df, _, __, ratio, p in rows:
        test = {"name": test_name, "statistic": "F", "value": ratio, "df": [int(df), df_of_error], "p": p}
        identifier = f"r/{entry['id']}/{_safe(name)}"
        document = record(identifier, test=test, sample=_sample(entry))
        yield Case("analysis of variance", f"R, {entry['page']}", document, in_full=int(df) > 1)


def _of_tukey(entry: Document) -> Iterator[Case]:
    start = next(at for at, line in enumerate(entry["lines"]) if "p adj" in line) + 1
    for line in filter(None, entry["lines"][start:]):
        name, value, low, high, p = line.split()
        test = {"name": "Tukey's honest significant difference", "p": p, "p_kind": "adjusted"}
        limits = {"level": 0.95, "low": low, "high": high, "adjusted": True}
        estimate = {"measure": "mean difference", "value": value, "unit": "1", "interval": limits}
        identifier = f"r/{entry['id']}/{_safe(name)}"
        yield Case(
            "Tukey", f"R, {entry['page']}", record(identifier, test=test, estimate=estimate, sample=_sample(entry))
        )


def _safe(name: str) -> str:
    return re.sub(r"[^\w.:^()-]", "_", name)
