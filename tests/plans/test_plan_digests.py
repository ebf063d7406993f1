"""The digest that seals a plan: by what it says, not by how it is written."""

from __future__ import annotations

import hashlib
import json
import random
from pathlib import Path
from typing import Any

import pytest
from plans.planting import PLAN, hypothesis
from support import Document, changed

from gatecheck.plans.canonical import canonical, digest_of, filled, has_open_slots, whole_digest_of
from gatecheck.plans.reading import plan_of

OPEN: Document = {"id": "H1", "text": "To be chosen after the pilot.", "role": "primary", "deferred": True}
FILL: Document = {**OPEN, "outcome": {"variable": "earthworm_biomass"}, "sides": 2, "n": {"planned": 40}}


def of_text(name: str, text: str) -> str:
    plan = plan_of(name, text.encode())
    assert plan.problems == ()
    return digest_of(plan.document)


def with_hypothesis(document: Document) -> Document:
    return changed(PLAN, hypotheses=[document])


def test_the_canonical_text_is_as_documented() -> None:
    document = {"b": [36.0, -0.0, 0.05, 1e-5, 1e20, True, None], "a": "\u00e9\U0001f331", "n": "36", "Z": 36}

    assert canonical(document) == (
        '{"Z":36,"a":"\\u00e9\\ud83c\\udf31","b":[36,0,0.05,1e-05,100000000000000000000,true,null],"n":"36"}'
    )


def test_the_digest_is_that_of_the_canonical_text() -> None:
    """Worked out here by hand from the documented form, for a plan in one line."""
    document = {"title": "T", "id": "p", "gatecheck": "plan/1", "data": "none"}
    text = '{"data":"none","gatecheck":"plan/1","id":"p","title":"T"}'

    assert digest_of(document) == "sha256:" + hashlib.sha256(text.encode()).hexdigest()


def test_key_order_spacing_comments_and_format_do_not_count() -> None:
    text = json.dumps(PLAN)
    pretty = json.dumps(PLAN, indent=4, sort_keys=True)
    yaml = (
        "# a registration\nid: drainage\ngatecheck: plan/1\ntitle: 'Drainage and soil life'\ndata: \"none\"\n"
        "hypotheses:\n- direction: increase   # one-sided claim\n"
        "  text: Drainage increases\n    earthworm biomass.\n"
        "  id: H1\n  n: {unit: plot, planned: 3.6e1}\n"
        "  outcome: {time_point: 30 days, variable: earthworm_biomass}\n"
    )

    digests = {of_text("p.json", text), of_text("p.json", pretty), of_text("p.yml", yaml), digest_of(PLAN)}
    assert len(digests) == 1


def test_a_number_and_the_same_digits_in_quotes_differ() -> None:
    exact, rounded = hypothesis(smallest_effect=2.5), hypothesis(smallest_effect="2.5")

    assert digest_of(exact) != digest_of(rounded)
    assert digest_of(hypothesis(smallest_effect=2.50)) == digest_of(exact)


@pytest.mark.parametrize(
    "changes",
    [
        {"title": "Drainage and soil life "},
        {"data": "unseen"},
        {"hypotheses": []},
        {"hypotheses": [PLAN["hypotheses"][0]] * 2},
        {"families": None},
        {"title": "Drainage and soil lif\u00e9"},
        {"title": "Drainage and soil life\u0301"},
    ],
)
def test_whatever_else_changes_the_document_changes_the_digest(changes: Document) -> None:
    assert digest_of(changed(PLAN, **changes)) != digest_of(PLAN)


def test_any_one_value_counts() -> None:
    """Over 300 plans with one leaf replaced, no digest is that of the plan."""
    random_ = random.Random(20310402)  # noqa: S311  # a seed that can be repeated
    seen = set()
    for turn in range(300):
        document = json.loads(json.dumps(PLAN))
        place: Any = document
        while True:
            key: Any = random_.choice(list(place) if isinstance(place, dict) else range(len(place)))
            if not isinstance(place[key], dict | list):
                place[key] = f"other {turn}"
                break
            place = place[key]
        seen.add(digest_of(document))
    assert len(seen) == 300
    assert digest_of(PLAN) not in seen


def test_a_deferred_hypothesis_is_filled_under_the_same_seal() -> None:
    opened, done = with_hypothesis(OPEN), with_hypothesis(FILL)

    assert digest_of(opened) == digest_of(done)
    assert whole_digest_of(opened) != whole_digest_of(done)
    assert whole_digest_of(PLAN) == digest_of(PLAN)
    assert has_open_slots(opened)
    assert not has_open_slots(done)
    assert filled(opened, done)["hypotheses"] == [FILL]


def test_a_deferred_number_of_units_is_filled_under_the_same_seal() -> None:
    opened = hypothesis(n={"deferred": True, "unit": "plot"})
    done = hypothesis(n={"deferred": True, "unit": "plot", "planned": 40})

    assert digest_of(opened) == digest_of(done)
    assert has_open_slots(opened)
    assert not has_open_slots(done)
    assert filled(opened, done) == done
    assert filled(opened, hypothesis(n=...)) == opened


@pytest.mark.parametrize(
    ("before", "after"),
    [
        (with_hypothesis(OPEN), with_hypothesis({**OPEN, "text": "Another question."})),
        (with_hypothesis(OPEN), with_hypothesis({**OPEN, "role": "secondary"})),
        (with_hypothesis(OPEN), with_hypothesis({key: FILL[key] for key in FILL if key != "deferred"})),
        (hypothesis(n={"deferred": True, "unit": "plot"}), hypothesis(n={"deferred": True, "unit": "pair"})),
        (hypothesis(n={"deferred": True}), hypothesis(n={"planned": 40})),
        (hypothesis(n={"deferred": True}), hypothesis(n={"deferred": True}, sides=1)),
        (hypothesis(), hypothesis(deferred=True)),
        (hypothesis(n={"planned": 36}), hypothesis(n={"planned": 36, "deferred": True})),
    ],
)
def test_a_fill_changes_nothing_else(before: Document, after: Document) -> None:
    assert digest_of(before) != digest_of(after)


def test_a_fill_takes_nothing_back() -> None:
    """What the slot said when it was sealed stays, whatever a later version says there."""
    later = with_hypothesis({**FILL, "text": "Another question.", "role": "secondary"})

    assert filled(with_hypothesis(OPEN), later) == with_hypothesis(FILL)
    assert filled(
        hypothesis(n={"deferred": True, "unit": "plot"}), hypothesis(n={"planned": 9, "unit": "pair"})
    ) == (hypothesis(n={"deferred": True, "unit": "plot", "planned": 9}))


def test_what_is_filled_already_is_not_filled_again() -> None:
    other = with_hypothesis({**FILL, "sides": 1})

    assert filled(with_hypothesis(FILL), other) == with_hypothesis(FILL)
    assert filled(with_hypothesis(OPEN), changed(PLAN, hypotheses=...))["hypotheses"] == [OPEN]
    assert filled(PLAN, hypothesis(n={"planned": 99})) == PLAN


def test_a_plan_without_hypotheses_has_no_slots(tmp_path: Path) -> None:
    bare = changed(PLAN, hypotheses=...)

    assert not has_open_slots(bare)
    assert filled(bare, PLAN) == {**bare, "hypotheses": []}
    assert not any(tmp_path.iterdir())
