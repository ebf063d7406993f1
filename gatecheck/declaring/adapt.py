"""Choose the adapter that knows a result."""

from __future__ import annotations

from typing import Any

from gatecheck.declaring.derived import Derived, Given
from gatecheck.declaring.errors import DeclareError
from gatecheck.declaring.scipy_results import scipy_adapter
from gatecheck.declaring.statsmodels_results import is_anova_table, is_fit, of_anova_table, of_fit
from gatecheck.declaring.values import degrees, is_number, number, plain

_STATISTIC_AND_P = 2
_WITH_DF = 3


def derive(result: object, given: Given) -> Derived:
    """Return what `result` says; nothing where it is `None` and plain numbers are given.

    Raises
    ------
    DeclareError
        The kind of result is not known, or needs something that the caller did not say.
    """
    if is_fit(result):
        return of_fit(result, given)
    if is_anova_table(result):
        return of_anova_table(result, given)
    if given.coefficient is not None:
        raise DeclareError("coefficient names a term of a fit or of a table of terms: leave it out here")
    if result is None:
        return Derived()
    adapter = scipy_adapter(result)
    if adapter is not None:
        return adapter(result, given)
    if isinstance(result, tuple) and all(map(is_number, plain(result))):
        return _of_tuple(result, given)
    raise DeclareError(_unknown(result))


def _of_tuple(result: tuple[Any, ...], given: Given) -> Derived:
    """Read (statistic, p) or (t, p, df), which statsmodels returns from tests of means and proportions."""
    statistic = given.test.get("statistic") or ("t" if len(result) == _WITH_DF else None)
    if len(result) not in {_STATISTIC_AND_P, _WITH_DF}:
        raise DeclareError(_unknown(result))
    if statistic is None:
        raise DeclareError(
            "a tuple of two numbers may hold any statistic: say which, test={'statistic': 'z'} "
            "(t, z, chi2, F or r, with 'df' where it has them)"
        )
    test = {"statistic": statistic, "value": number(result[0], statistic), "p": number(result[1], "p")}
    df = degrees(result[2]) if len(result) == _WITH_DF else None
    return Derived(test | {"df": df}, directed=True)


def _unknown(result: object) -> str:
    kind = type(result)
    name = f"{kind.__module__}.{kind.__qualname__}".removeprefix("builtins.")
    return (
        f"declare does not know results of the type {name}: give plain numbers, "
        "test={'statistic': 't', 'value': ..., 'df': ..., 'p': ...} and "
        "estimate={'measure': ..., 'value': ..., 'unit': ...}"
    )
