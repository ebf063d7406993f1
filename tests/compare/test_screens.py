"""Facts of whole screens: what is expected of their design, and the level at which a share of hits is false."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.columns import columns_of
from gatecheck.compare.screens import alpha_within, is_whole_screen, screens
from gatecheck.model.found import Found
from gatecheck.model.numbers import exact
from gatecheck.model.record import NamedStatistic, Record, Removed, Screen
from gatecheck.model.record import Test as SingleTest
from gatecheck.model.verdict import Place
from gatecheck.weigh.long_run import long_run_false_positive_risk


def record(screen: Screen | None, test: SingleTest | None = None) -> Record:
    """A record of one screen."""
    return Record("record/1", "compounds", "Actives.", test=test, screen=screen)


def test_facts_stand_row_by_row_and_are_unknown_where_there_is_no_screen() -> None:
    removed = (Removed(2300, "low count"), Removed(40, "edge wells", planned=True))
    given_ones = [
        record(Screen(10_000, 139, 0.01, 0.8, 0.005)),
        record(None),
        record(Screen(10_000, 139, 0.01, 0.8, None, "candidates", removed)),
    ]

    found = screens(columns_of([Found(each, Place("a.json"), {}) for each in given_ones]))

    np.testing.assert_allclose(found.true_positives, [40, np.nan, np.nan], rtol=1e-14)
    np.testing.assert_allclose(found.false_positives, [99.5, np.nan, np.nan], rtol=1e-14)
    np.testing.assert_allclose(found.false_share, [99.5 / 139.5, np.nan, np.nan], rtol=1e-14)
    assert found.unplanned.tolist() == [0, 0, 2300]
    assert found.as_findings.tolist() == [True, True, False]
    assert not found.by_chance.any()
    assert not found.unlike_design.any()


@given(st.floats(1e-6, 0.5), st.floats(1e-3, 1), st.floats(1e-6, 0.5))
def test_at_the_level_within_the_limit_the_share_is_the_limit(limit: float, power: float, prior: float) -> None:
    alpha = alpha_within(limit, Screen(power=power, prior=prior))

    if alpha <= 1:
        assert float(long_run_false_positive_risk(alpha, power, prior)) == pytest.approx(limit, rel=1e-12)
    else:  # even a test that always rejects leaves a smaller share
        assert float(long_run_false_positive_risk(1, power, prior)) < limit


@pytest.mark.parametrize("screen", [Screen(prior=0.1), Screen(power=0.8)])
def test_no_level_is_told_without_power_or_prior(screen: Screen) -> None:
    assert math.isnan(alpha_within(0.05, screen))


@pytest.mark.parametrize(
    ("screen", "test", "whole"),
    [
        (Screen(), None, True),
        (Screen(), SingleTest("robust z", alpha=0.01), True),
        (Screen(), SingleTest(p=exact(0.03)), False),
        (Screen(), SingleTest(statistic="z", value=exact(2.0)), False),
        (Screen(), SingleTest(named_statistic=NamedStatistic("U", exact(93))), False),
        (None, None, False),
    ],
)
def test_a_whole_screen_has_no_result_of_a_single_test(
    screen: Screen | None, test: SingleTest | None, whole: bool
) -> None:
    assert is_whole_screen(record(screen, test)) is whole
