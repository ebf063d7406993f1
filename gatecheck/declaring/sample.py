"""The sample that stands behind a result: groups from raw values, and the number of units."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

from gatecheck.declaring.derived import Derived
from gatecheck.declaring.errors import DeclareError
from gatecheck.declaring.values import is_number, plain


def with_groups(sample: Any) -> Any:
    """Return `sample` with its groups as the contract's list, where they are given by name."""
    if not isinstance(sample, Mapping) or not isinstance(sample.get("groups"), Mapping):
        return plain(sample)
    groups = [_group(name, plain(values)) for name, values in sample["groups"].items()]
    return plain({**sample, "groups": groups})


def with_n(sample: Mapping[str, Any], test: Mapping[str, Any], derived: Derived) -> dict[str, Any]:
    """Return `sample` with `n`, where the result or the groups are certain of it."""
    n = derived.n if derived.n is not None else _units(sample, test, derived)
    return dict(sample) if "n" in sample or n is None else {"n": n, **sample}


def _units(sample: Mapping[str, Any], test: Mapping[str, Any], derived: Derived) -> int | None:
    sizes = group_sizes(sample)
    if not sizes or derived.paired is None:
        return None
    same = len(set(sizes)) == 1
    # With n pairs a paired t has n - 1 degrees of freedom, where two groups of n have more.
    by_df = test.get("statistic") == "t" and test.get("df") == sizes[0] - 1
    return sizes[0] if same and (derived.paired or by_df) else sum(sizes)


def group_sizes(sample: Mapping[str, Any]) -> list[int]:
    """Return the sizes of the groups; none where one of them is not known."""
    groups = sample.get("groups")
    if not isinstance(groups, list):
        return []
    sizes = [group.get("n") if isinstance(group, Mapping) else None for group in groups]
    return [size for size in sizes if isinstance(size, int)] if None not in sizes else []


def _group(name: Any, values: Any) -> dict[str, Any]:
    if isinstance(values, Mapping):
        return {"name": name, **values}
    if not isinstance(values, list) or not values or not all(map(is_number, values)):
        raise DeclareError(
            f"sample.groups[{name!r}] is no list of finite numbers: give the values analysed, "
            "or {'n': ..., 'mean': ..., 'sd': ...}"
        )
    return {"name": name, "n": len(values), **_moments(values)}


def _moments(values: Sequence[float]) -> dict[str, float]:
    n = len(values)
    mean = math.fsum(values) / n
    if n == 1:
        return {"mean": mean}
    return {"mean": mean, "sd": math.sqrt(math.fsum((value - mean) ** 2 for value in values) / (n - 1))}
