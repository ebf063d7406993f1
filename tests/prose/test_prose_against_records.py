"""Prose held against records: links, statistics, percentages, and what a sentence calls a result."""

from __future__ import annotations

import pytest
from prose.prosing import ID, held, judged, known, only, passage, record

from gatecheck.model.numbers import exact
from gatecheck.prose.agree import (
    CalledConfirmed,
    Facts,
    NothingClaimed,
    NumberDiffers,
    ShareDiffers,
    StatisticDiffers,
    broken_links,
    held_against,
    numbers_that_differ,
)
from gatecheck.prose.fields import fields_of, number_of, subjects

EVIDENCE = ["risk", "prior-needed"]


def link(field: str, identifier: str = ID) -> str:
    """A marker."""
    return f"<!-- gatecheck: {identifier} {field} -->"


def says_nothing(facts: Facts) -> bool:
    """Whether text and records agree, and every link leads somewhere."""
    return not facts.facts and not facts.problems


def differing(facts: Facts) -> list[tuple[str, str]]:
    """Of each statistic that differs the nearest record, and what that has in place of what."""
    assert facts.problems == ()
    return [_nearest(one.what) for one in facts.facts if isinstance(one.what, StatisticDiffers)]


def _nearest(what: StatisticDiffers) -> tuple[str, str]:
    if what.nearest is None:
        return "", ""
    told = [f"{each.figure} {each.recorded} not {each.shown}" for each in what.nearest.differences]
    return what.nearest.record.id, ", ".join(told)


@pytest.mark.parametrize(
    ("shown", "field"),
    [
        ("4.2", "estimate.value"),
        ("4", "estimate.value"),
        ("8.1", "estimate.interval.high"),
        ("95 %", "estimate.interval.level"),
        ("0.95", "estimate.interval.level"),
        (".034", "test.p"),
        ("2.21", "test.value"),
        ("34", "test.df"),
        ("36", "sample.n"),
        ("18", "sample.groups[1].n"),
        ("16.9", "sample.groups[1].mean"),
        ("1.0", "alternative.effect"),
    ],
)
def test_a_linked_number_that_is_the_record_s(shown: str, field: str) -> None:
    assert says_nothing(held(f"It was {shown} {link(field)}."))
    assert number_of(known()[ID], field) is not None


@pytest.mark.parametrize(("shown", "estimate", "stands"), [("3.8", 3.3, False), ("3.3", 3.28, True)])
def test_a_number_in_the_text_is_the_record_s_within_its_digits(shown: str, estimate: float, stands: bool) -> None:
    """A yield of 3.8 in the text against 3.3 in the record; and of 3.3 against 3.28."""
    facts = held(f"Yield rose by {shown} g {link('estimate.value')}.", record(estimate__value=estimate))

    assert says_nothing(facts) is stands


def test_a_linked_number_that_differs() -> None:
    text = f"One.\n\nBiomass rose by 3.8 g {link('estimate.value')}."

    fact = only(held(text))

    assert (fact.linked, text[fact.at :].startswith("3.8 g"), fact.passage.line(fact.at)) == (True, True, 3)
    assert isinstance(fact.what, NumberDiffers)
    assert (fact.what.number.text, fact.what.recorded.value, fact.what.anew) == ("3.8", 4.2, "4.2")
    assert [one.anew for one in numbers_that_differ(passage(text), known())] == ["4.2"]


def test_figures_of_the_evidence_can_be_linked() -> None:
    text = f"risk 12 % {link('risk')}, prior .81 {link('prior-needed')}, risk 13 % {link('risk')}"

    facts = held_against([passage(text)], subjects([record()], [judged()]))

    fact = only(facts)
    assert isinstance(fact.what, NumberDiffers)
    assert (fact.what.number.text, fact.what.anew) == ("13", "12")


def test_evidence_that_was_not_computed_is_no_number() -> None:
    unknown = subjects([record()], [judged(risk=None)])

    facts = held_against([passage(f"risk 12 % {link('risk')}")], unknown)

    assert [one.message for one in facts.problems] == [f"{ID} has no number in risk"]
    assert [name for name in fields_of(unknown[ID]) if name in EVIDENCE] == ["prior-needed"]
    assert [name for name in fields_of(known()[ID]) if name in EVIDENCE] == []


def test_the_fields_of_a_record_are_those_with_a_number() -> None:
    fields = list(fields_of(known(record(test__df=[34], importance=True))[ID]))

    assert fields[:4] == ["test.value", "test.df", "test.p", "test.sides"]
    assert {"estimate.interval.low", "sample.groups[0].n", "alternative.effect"} <= set(fields)
    assert all(number_of(known()[ID], field) is not None for field in fields)
    assert {"importance", "id", "claim"}.isdisjoint(fields)


def test_a_percent_sign_may_be_the_unit_of_the_estimate() -> None:
    cover = record(id="cover", estimate__unit="percent", estimate__value=25.0, estimate__interval=...)
    text = f"25 % {link('estimate.value', 'cover')} of 12 % {link('estimate.value', 'cover')}"

    fact = only(held(text, cover))

    assert isinstance(fact.what, NumberDiffers)
    assert (fact.what.number.text, fact.what.anew) == ("12", "25")


@pytest.mark.parametrize(
    ("text", "message", "advice"),
    [
        (
            f"3 {link('estimate.value', 'drainage/earthworm')}",
            "the link to drainage/earthworm leads to no record",
            f"the nearest known one is {ID}",
        ),
        (
            f"3 {link('claim', 'x')}",
            "the link to x leads to no record",
            "`gatecheck survey` lists the records",
        ),
        (
            f"3 {link('estimate.valu')}",
            f"{ID} has no number in estimate.valu",
            "the nearest field with a number is estimate.value",
        ),
        (f"3 {link('claim.x')}", f"{ID} has no number in claim.x", "name a field that holds a number"),
        (f"3 {link('id')}", f"{ID} has no number in id", "name a field that holds a number"),
        (
            f"3 {link('sample.groups[7].n')}",
            f"{ID} has no number in sample.groups[7].n",
            "the nearest field with a number is sample.groups[1].n",
        ),
        (
            f"3 {link('test.df[0][0]')}",
            f"{ID} has no number in test.df[0][0]",
            "the nearest field with a number is test.df",
        ),
        (
            f"None {link('test.p')}",
            f"no number stands before the link to {ID} test.p",
            "put the link right behind its number, in the same paragraph",
        ),
        (
            "3 <!-- gatecheck: x -->",
            "the link 'x' is not an id and a field",
            "write `gatecheck: ID FIELD`, such as `gatecheck: yield/spring estimate.value`",
        ),
    ],
)
def test_links_that_lead_nowhere(text: str, message: str, advice: str) -> None:
    facts = held(f"One.\n\n{text}")

    (problem,) = facts.problems
    assert (str(problem.at), problem.message, problem.advice) == ("a.md:3", message, advice)
    assert facts.facts == ()
    assert broken_links([passage(f"One.\n\n{text}")], known()) == facts.problems


def test_of_many_broken_links_only_the_first_are_told_the_nearest() -> None:
    facts = held("3 <!-- gatecheck: drainage/earthworm test.p -->, " * 30)

    assert [one.advice.startswith("the nearest") for one in facts.problems] == [True] * 20 + [False] * 10


def test_a_link_by_an_earlier_id_leads_to_the_record() -> None:
    assert says_nothing(held(f"p = .034 {link('test.p', 'old')}", record(aliases=["old"])))


def test_a_sentence_linked_to_a_record_that_claims_nothing() -> None:
    fact = only(held(f"Biomass rose. {link('claim')}", record(claim=...)))

    assert isinstance(fact.what, NothingClaimed)
    assert (fact.linked, fact.at, fact.what.record.id) == (True, 0, ID)
    assert says_nothing(held(f"Biomass rose. {link('claim')}"))


@pytest.mark.parametrize(
    ("sentence", "word"),
    [
        ("We confirmed that biomass rises.", "confirmed"),
        ("The registered analysis shows it.", "registered"),
        ("The Pre-registered analysis shows it.", "Pre-registered"),
        ("As predicted, biomass rises.", "As predicted"),
        ("It confirms the theory.", "confirms"),
    ],
)
def test_an_exploratory_result_is_not_to_be_called_confirmed(sentence: str, word: str) -> None:
    exploratory = record(status="exploratory")

    fact = only(held(f"{sentence} {link('claim')}", exploratory))

    assert isinstance(fact.what, CalledConfirmed)
    assert (fact.linked, fact.what.word, fact.what.record.id) == (True, word, ID)
    assert says_nothing(held(f"{sentence} {link('claim')}"))
    assert not isinstance(only(held(f"{sentence} {link('claim')}", record(status="descriptive"))).what, Facts)


@pytest.mark.parametrize(
    "sentence",
    [
        "Biomass rises.",
        "This is yet to be confirmed.",
        "This was not registered.",
        "It wasn't registered.",
        "A study should confirm it; confirmed it is in no other.",
        "In an exploratory look at registered plots it rises.",
        "This unregistered look awaits what a registered one finds.",
        "It was unconfirmed.",
    ],
)
def test_words_that_leave_it_open_are_no_confirmation(sentence: str) -> None:
    assert says_nothing(held(f"{sentence} {link('claim')}", record(status="exploratory")))


def test_a_sentence_is_told_once_however_many_links_it_has() -> None:
    text = f"We confirmed 4.2 {link('estimate.value')} and .034 {link('test.p')}. {link('claim')}"

    fact = only(held(text, record(status="exploratory")))

    assert isinstance(fact.what, CalledConfirmed)


def test_a_statistic_without_a_link_finds_its_record_s_status_too() -> None:
    text = "We confirmed it, t(34) = 2.21, p = .034."

    fact = only(held(text, record(status="exploratory")))

    assert isinstance(fact.what, CalledConfirmed)
    assert (fact.linked, fact.at) == (False, text.index("t(34)"))


@pytest.mark.parametrize(
    "text",
    [
        "t(34) = 2.21, p = .034",
        "t(34) = 2.2, p < .05",
        "t(34) = 2, p = .03",
        "t(34) = 2.21",
        "p = .034",
        "t = 2.21, p = .034",
        "4.2 g/m2 (95 % CI 0.34 to 8.06)",
        "4 (95% CI 0.3 to 8.1)",
        "95 % CI [0.34, 8.06]",
        "The mean of 4.2, of 36 (95 % CI 0.34 to 8.06)",
        "12/48 (25 %) and 5 of 40 (12.5 %)",
        "40 hits of 10,000 (0.4 %); 40/10,000 (0.4 %)",
    ],
)
def test_statistics_that_a_record_has(text: str) -> None:
    groups = [{"name": "a", "n": 48, "events": 12}, {"name": "b", "n": 40, "events": 5}, {"name": "c", "n": 2}]
    counted = record(id="counts", sample={"groups": groups}, test=..., estimate=...)
    screened = record(id="screen", screen={"tests": 10000, "hits": 40}, test=..., estimate=...)
    unscreened = record(id="other", screen={"tests": 10}, sample=..., test=..., estimate=...)

    assert says_nothing(held(text, record(), counted, screened, unscreened))


@pytest.mark.parametrize(
    ("text", "nearest", "says"),
    [
        ("t(34) = 2.21, p = .043", ID, "p 0.034 not .043"),
        ("t(34) = 2.21, p < .001", ID, "p 0.034 not < .001"),
        ("t(34) = 2.12, p = .034", ID, "t 2.21 not 2.12"),
        ("t(34) = 9.9", ID, "t 2.21 not 9.9"),
        ("t(34) = −2.21", ID, "t 2.21 not −2.21"),
        ("t(12) = 2.21, p = .034", "", ""),
        ("z = 2.21, p = .034", "", ""),
        ("t = 2.12, p = .034", "", ""),
        ("F(2, 57) = 3.4", "", ""),
        ("p = .2", "", ""),
        ("3.8 g (95 % CI 0.34 to 8.06)", ID, "estimate 4.2 not 3.8"),
        ("95 % CI 0.34 to 8.60", ID, "upper limit 8.06 not 8.60"),
        ("90 % CI 0.34 to 8.06", ID, "level 95 not 90"),
        ("95 % CI 1.1 to 5.4", "", ""),
        ("12/48 (25 %)", "", ""),
    ],
)
def test_statistics_that_no_record_has(text: str, nearest: str, says: str) -> None:
    facts = held(f"It was so ({text}).")

    assert differing(facts) == [(nearest, says)]
    assert [one.linked for one in facts.facts] == [False]
    assert says_nothing(held(f"It was so ({text}).", unlinked=False))


def test_the_yield_of_the_text_is_not_that_of_the_record() -> None:
    spring = record(id="yield", estimate__value=3.3, estimate__interval={"level": 0.95, "low": 1.1, "high": 5.4})

    assert differing(held("Yield rose by 3.8 g (95 % CI 1.1 to 5.4).", spring)) == [
        ("yield", "estimate 3.3 not 3.8")
    ]
    assert says_nothing(held("Yield rose by 3.3 g (95 % CI 1.1 to 5.4).", spring))


def test_the_nearest_of_several_records_is_named() -> None:
    first = record(id="first", test__value=2.11, test__p="0.042")
    third = record(id="third", test__value=2.31, test__p="0.027")

    assert differing(held("t(34) = 2.21, p = .027", first, record(), third)) == [(ID, "p 0.034 not .027")]
    assert differing(held("t(34) = 2.30, p = .027", first, record(), third)) == [("third", "t 2.31 not 2.30")]


def test_signs_rounding_and_figures_that_the_record_leaves_open() -> None:
    negative = record(id="n", test__value="-2.21", test__tail=...)
    welch = record(id="w", test__df=43.7, test__value=3.1, test__p=...)
    recovered = record(id="r", test__df=20, test__value=..., test__p="0.012")
    z = record(id="z", test={"statistic": "z", "value": 1.7, "p": "0.089", "sides": 2})
    chi2 = record(id="c", test={"statistic": "chi2", "value": 4.1, "df": 1, "p": "0.043"}, sample={"n": 90})
    text = (
        "t(34) = 2.21, p = .034; t(34) = -2.21; t(43.7) = 3.1, p = .003; t(44) = 3.10; t(20) = 2.77, p = .012; "
        "z = 1.70, p = .089; χ²(1, N = 90) = 4.1, p = .043"
    )

    assert says_nothing(held(text, negative, welch, recovered, z, chi2))
    assert differing(held("χ²(1, N = 91) = 4.1", chi2)) == [("c", "N 90 not 91")]
    assert says_nothing(held("χ²(1, N = 91) = 4.1", record(id="c", test=chi2_test(), sample=...)))


def chi2_test() -> dict[str, object]:
    """A chi-squared test as a record gives it."""
    return {"statistic": "chi2", "value": 4.1, "df": 1, "p": "0.043"}


def test_an_adjusted_p_is_the_record_s_too() -> None:
    adjusted = record(family={"name": "worms", "size": 3, "procedure": "holm", "adjusted_p": "0.102"})

    assert says_nothing(held("p = .102, and t(34) = 2.21, p = .102", adjusted))


def test_an_interval_in_percent_is_that_of_a_share() -> None:
    share = record(
        id="s",
        estimate={"measure": "share", "value": 0.125, "interval": {"level": 0.95, "low": 0.101, "high": 0.15}},
    )
    percent = record(
        id="p",
        estimate={
            "measure": "share",
            "value": 22.5,
            "unit": "%",
            "interval": {"level": 0.95, "low": 20, "high": 25},
        },
    )
    text = "12.5 % (95 % CI 10.1 % to 15.0 %) and 22.5 % (95 % CI 20 % to 25 %)"

    assert says_nothing(held(text, share, percent))


def test_an_interval_that_is_open_to_one_side() -> None:
    open_above = record(estimate__interval={"level": 0.95, "low": 0.34}, estimate__standard_error=...)

    assert differing(held("95 % CI 0.34 to 8.06", open_above)) == [(ID, "upper limit none not 8.06")]


def test_percentages_that_are_not_those_of_their_counts() -> None:
    text = "12/48 (26 %), 5 of 40 (12 %), 5 of 40 (13 %), 2/3 (66.7 %)"
    facts = held(text)

    wrong = [one.what.share for one in facts.facts if isinstance(one.what, ShareDiffers)]
    assert [(one.part, one.whole, one.percent.text) for one in wrong] == [(12, 48, "26")]
    assert len(facts.facts) == 4  # no record has the other counts


def test_the_statistics_of_a_linked_sentence_are_held_against_its_record() -> None:
    fact = only(held(f"Biomass rose, t(34) = 2.21, p = .043. {link('claim')}", unlinked=False))

    assert isinstance(fact.what, StatisticDiffers)
    assert (fact.linked, _nearest(fact.what)) == (True, (ID, "p 0.034 not .043"))


def test_a_second_result_in_a_linked_sentence_may_be_of_another_record() -> None:
    other = record(id="ph", test={"statistic": "z", "value": 1.7, "p": "0.089", "sides": 2})
    text = f"Biomass rose, t(34) = 2.21, p = .034, and pH did not, z = 1.70, p = .089. {link('claim')}"

    assert says_nothing(held(text, record(), other))
    (fact,) = held(text).facts
    assert isinstance(fact.what, StatisticDiffers)
    assert (fact.linked, fact.what.nearest) == (False, None)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("p = .2 LINK", "p 0.034 not .2"),
        ("t(34) = 2.21, p = .2 LINK", "p 0.034 not .2"),
        ("3.8 (95 % CI 0.34 to 8.06 LINK)", "estimate 4.2 not 3.8"),
        ("4.2 (95 % CI 0.4 to 8.06 LINK)", "lower limit 0.34 not 0.4"),
    ],
)
def test_a_statistic_with_a_linked_number_is_held_against_that_record(text: str, says: str) -> None:
    """The p is linked by the claim, and the number by a field that it agrees with."""
    field = "estimate.interval.high" if "CI" in text else "claim"

    fact = only(held(text.replace("LINK", link(field)), unlinked=False))

    assert isinstance(fact.what, StatisticDiffers)
    assert (fact.linked, _nearest(fact.what)) == (True, (ID, says))


def test_what_a_number_s_own_link_tells_is_not_told_twice() -> None:
    facts = held(f"t(34) = 2.21, p = .2 {link('test.p')}")

    assert [type(one.what) for one in facts.facts] == [NumberDiffers]


@pytest.mark.parametrize(
    "text",
    ["12/48 (25 %) LINK", "z = 2.21, p = .9 LINK", "80 % CI 1 to 5.4 LINK"],
)
def test_a_linked_sentence_may_hold_what_its_record_has_nothing_alike_of(text: str) -> None:
    facts = held(text.replace("LINK", link("claim")))

    assert differing(facts) == [("", "")]
    assert [one.linked for one in facts.facts] == [False]


def test_a_number_may_be_linked_to_a_record_that_has_nothing_alike() -> None:
    """What has a link of its own is left to it."""
    no_test = record(id="x", test=..., estimate=...)

    assert says_nothing(held(f"p = .2 and z = 36 {link('sample.n', 'x')}, p = .3.", no_test, unlinked=False))


def test_code_and_references_are_left_alone() -> None:
    text = """Text.

```
t(34) = 9.9
```

`t(34) = 9.9` <!-- t(34) = 9.9 -->

## References

Others found t(34) = 9.9.

### More of them

And t(34) = 9.8.

## After

Here t(34) = 9.7.
"""

    facts = held(text)

    assert [facts.facts[0].passage.line(one.at) for one in facts.facts] == [19]
    assert says_nothing(held("# Bibliography\n\nt(34) = 9.9"))


@pytest.mark.parametrize(
    "text",
    [
        "Smith et al. (2031) reported t(20) = 3.10, p = .006.",
        "Earlier work found r = .30, p = .02 [@smith2031].",
        "As @smith2031 says, t(20) = 3.10.",
        r"Others \citep{smith} have t(20) = 3.10.",
        "Others :cite:p:`smith` have t(20) = 3.10.",
        "Smith (2031) has p = .006.",
        "It was found before (Smith & Jones, 2031; p = .006).",
        "It was seen in 12/48 (25 %) plots (see Jones 2031).",
    ],
)
def test_results_of_others_beside_a_citation_are_left_alone(text: str) -> None:
    assert says_nothing(held(f"One thing.\n\n{text} More.", record(id="x", test__df=20, test__value=3.2)))


@pytest.mark.parametrize(
    "text",
    [
        "Unlike Smith et al. (2031), we found t(20) = 3.10, p = .006.",
        "Smith et al. (2031) saw it. It was so, t(20) = 3.10, p = .006.",
        "In Spring (2031) it was so, t(20) = 3.10.",
        "In the plots (May 2031) it was so, t(20) = 3.10.",
        "Mail to a@b.org, t(20) = 3.10.",
        "As in Smith (2031), this sample has t(20) = 3.10.",
        f"Smith et al. (2031) reported t(34) = 3.10. {link('claim')}",
        "Smith et al. (2031) saw it in 12/48 (26 %).",
    ],
)
def test_own_results_beside_a_citation_are_held_against_the_records(text: str) -> None:
    assert len(held(f"One thing.\n\n{text}").facts) == 1


def test_values_that_are_odd_do_no_harm() -> None:
    assert number_of(known()[ID], "estimate.measure") is None
    assert number_of(known()[ID], "no..thing") is None
    assert number_of(known()[ID], "__class__") is None
    recorded = number_of(known()[ID], "sample.n")
    assert recorded is not None
    assert recorded == exact(36.0)
