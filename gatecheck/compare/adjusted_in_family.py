"""The adjusted p of a family that is whole in the tree, from the raw results of all of its members."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import replace

import numpy as np

from gatecheck.columns import Columns, Floats
from gatecheck.compare.families import family_facts
from gatecheck.evidence import Evidence

Ends = tuple[Floats, Floats]


def within_family(columns: Columns, evidence: Evidence, raw: Ends, bounds: Ends) -> Ends:
    """Return `bounds` of the adjusted p, drawn in where the family is whole.

    `raw` are the ends of what the statistic says of the raw p. One that is reported may stand for it too. Every
    procedure gives a greater adjusted p where a raw one is greater, so that the ends give the ends.
    """
    test = columns.test
    own = (test.p_is_raw | test.p_is_exact) & test.p.known
    low = np.fmin(raw[0], np.where(own, np.maximum(test.p.low, 0.0), np.nan))
    high = np.fmax(raw[1], np.where(own, np.minimum(test.p.high, 1.0), np.nan))
    least, most = (_adjusted(columns, evidence, np.clip(each, 0.0, 1.0)) for each in (low, high))
    whole = np.isfinite(least) & np.isfinite(most)
    return np.where(whole, least, bounds[0]), np.where(whole, most, bounds[1])


def _adjusted(columns: Columns, evidence: Evidence, p: Floats) -> Floats:
    """Adjusted anew by the procedure of each family; nan where it is not whole."""
    with np.errstate(all="ignore"):
        statistics = replace(evidence.statistics, log_p=np.log(p))
    facts = family_facts(columns, replace(evidence, statistics=statistics))
    members: dict[str, set[str]] = defaultdict(set)
    for one in columns.found:
        if one.record.family is not None:
            members[one.record.family.name].add(one.record.id)
    adjusted = np.full(len(facts), np.nan)
    for row, (one, fact) in enumerate(zip(columns.found, facts, strict=True)):
        family = one.record.family
        # A record that stands in two files is one member.
        if (
            family is not None
            and fact is not None
            and fact.sizes == (fact.members,) == (len(members[family.name]),)
        ):
            adjusted[row] = fact.adjusted
    return adjusted
