"""The accuracy that the script measures at length, on a sample of its points; whether its corners are complete."""

from __future__ import annotations

import random

import mpmath as mp
import pytest
from weigh import measure_accuracy as measured
from weigh.accuracy_points import Switch

SEED = 7
# Of the default priors a true value takes up to a second.
COUNTS = {"t": 120, "r": 40, "z": 120, "chi-squared": 60, "F": 60, "default-prior t": 3, "default-prior r": 20}


def is_quick(name: str, row: measured.Row) -> bool:
    return not name.startswith("default") or row[-1] == 0


@pytest.mark.parametrize("name", sorted(measured.FUNCTIONS))
def test_the_error_is_within_the_target(name: str) -> None:
    function = measured.FUNCTIONS[name]
    choice = random.Random(SEED)  # noqa: S311  # a sample, not a secret
    corners = [row for row in function.corners() if is_quick(name, row)]
    drawn = [row for row in measured.random_rows(name, COUNTS[name], SEED) if is_quick(name, row)]
    rows = choice.sample(corners, min(COUNTS[name], len(corners))) + drawn
    errors = measured.errors(name, rows)
    worst = max(range(len(rows)), key=errors.__getitem__)
    assert len(drawn) >= 0.6 * COUNTS[name]
    assert errors[worst] <= function.target, rows[worst]


@pytest.mark.parametrize(
    ("name", "switch"),
    [(name, switch) for name, function in measured.FUNCTIONS.items() for switch in function.switches()],
    ids=lambda value: getattr(value, "name", value),
)
def test_the_corners_hold_both_sides_of_every_switch(name: str, switch: Switch) -> None:
    places = [switch.quantity(*row) / switch.at for row in measured.FUNCTIONS[name].corners()]
    assert any(1 - 1e-8 < place < 1 for place in places)
    assert any(1 <= place < 1 + 1e-8 for place in places)


def test_the_random_points_are_many_and_the_same_for_a_seed() -> None:
    assert sum(function.points for function in measured.FUNCTIONS.values()) >= 20_000
    for name in measured.FUNCTIONS:
        assert measured.random_rows(name, 5, 1) == measured.random_rows(name, 5, 1)
        assert measured.random_rows(name, 5, 1) != measured.random_rows(name, 5, 2)


def test_a_result_that_is_no_number_counts_as_wrong() -> None:
    assert measured.error(float("nan"), mp.mpf(1)) == float("inf")
    assert measured.error(2.0, mp.mpf(4)) == 0.5
    assert measured.error(0.25, mp.mpf(0)) == 0.25
