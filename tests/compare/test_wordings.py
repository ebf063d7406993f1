"""Phrases found in claims: each that is listed is found, and what only looks like one is let be."""

from __future__ import annotations

import itertools
import json
import time
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gatecheck.compare import wordings as module
from gatecheck.compare.phrasing import index_of, pattern_of, tokens_of
from gatecheck.compare.wordings import Wording, phrase_of, wordings

LISTS = {path.stem: json.loads(path.read_text(encoding="utf-8")) for path in sorted(module._PHRASES.glob("*.json"))}
ENGLISH: dict[str, Any] = LISTS["en"]


def found(text: str) -> list[Wording]:
    """The words found in an English text."""
    (words,) = wordings([text], [("en",)])
    return list(words)


def kinds(text: str) -> list[str]:
    """Their kinds."""
    return [each.phrase.kind for each in found(text)]


def example_of(pattern: str) -> str:
    """A text that a pattern is for: of each element the first word, optional ones and gaps left out."""
    words = []
    for element in pattern.split():
        if element.startswith("..") or element.endswith("?"):
            continue
        first = element.split("|")[0]
        words.append({"$": "", "#": "3"}.get(first, first))
    return " ".join(words)


PATTERNS = [(one["kind"], pattern) for one in ENGLISH["phrases"] for pattern in one["patterns"]]
EXCEPTIONS = [(one["kind"], one["patterns"], each) for one in ENGLISH["phrases"] for each in one.get("unless", ())]


def wordings_of(pattern: str) -> list[str]:
    """Texts that a pattern is for: wordings without gaps, up to some hundreds."""
    elements = []
    for element in pattern.split():
        if not element.startswith(".."):
            words = [{"$": ".", "#": "3"}.get(word, word) for word in element.removesuffix("?").split("|")]
            elements.append([*words, ""] if element.endswith("?") else words)
    return [" ".join(each) for each in itertools.islice(itertools.product(*elements), 600)]


@pytest.mark.parametrize(("kind", "pattern"), PATTERNS)
def test_each_phrase_is_found(kind: str, pattern: str) -> None:
    """In some plain sentence its first wording is found, and no exception or other kind takes its place."""
    text = example_of(pattern)

    sentences = (text, f"Drainage {text}.", f"Drainage {text} yields.", f"The {text} of it.")
    assert [each for each in sentences if kind in kinds(each)], text


@pytest.mark.parametrize(("kind", "patterns", "exception"), EXCEPTIONS)
def test_each_exception_hides_its_phrase(kind: str, patterns: list[str], exception: str) -> None:
    """No wording of the exception is found, and some text that it is for would be found without it."""
    texts = wordings_of(exception)
    without, held = index_of(patterns), [*texts, *(f"is {text} in it" for text in texts), *CAREFUL]
    hidden = [text for text in held if index_of([exception]).spans(tokens_of(text))]

    assert [text for text in texts if kind in kinds(text)] == []
    assert [text for text in hidden if without.spans(tokens_of(text))], "the exception hides nothing"


FLAGGED = [
    ("Drainage had no effect on yield.", "no-effect", "no effect"),
    ("THERE WAS NO DIFFERENCE BETWEEN THE TWO SOILS.", "no-effect", "NO DIFFERENCE"),
    ("Mulch doesn’t affect germination.", "no-effect", "doesn’t affect"),
    ("The two doses are the same.", "no-effect", "are the same"),
    ("Yield was the same in both groups.", "no-effect", "was the same"),
    ("Yields were similar.", "no-effect", "were similar"),
    ("Yields were comparable between arms.", "no-effect", "were comparable"),
    ("Yield was no different on drained plots.", "no-effect", "was no different"),
    ("Both arms had similar survival.", "no-effect", "had similar survival"),
    ("The two models performed equally well.", "no-effect", "performed equally"),
    ("From baseline to week 12 there was no change.", "no-effect", "no change"),
    ("After adjusting for baseline values there was no difference.", "no-effect", "no difference"),
    ("Seedling height is unaffected by shade.", "no-effect", "is unaffected"),
    ("Programme and control areas did not differ.", "no-effect", "did not differ"),
    ("The old and the new index are statistically equivalent.", "no-effect", "statistically equivalent"),
    ("Little to no difference in latency.", "no-effect", "Little to no difference"),
    ("The new feed is safe.", "safe", "is safe"),
    ("The feed additive was well tolerated.", "safe", "well tolerated"),
    ("There is no harm to latency.", "safe", "no harm"),
    ("The dressing has no adverse effects on healing.", "safe", "no adverse effects"),
    ("The short course is no worse.", "not-worse", "no worse"),
    ("The new model shows no regression.", "not-worse", "no regression"),
    ("Liming works only on drained plots.", "difference", "works only on"),
    ("Liming raised yield in sandy soil but not in clay.", "difference", "in sandy soil but not"),
    ("The effect was stronger in women than in men.", "difference", "effect was stronger in"),
    ("Only the treated group improved.", "difference", "Only the treated group improved"),
    ("Biomass rose on drained plots, whereas undrained plots showed no change.", "difference", "whereas"),
    ("Observed power was 25 %, so the null result is unreliable.", "observed-power", "Observed power"),
    ("The post-hoc power of 0.31 explains the result.", "observed-power", "post-hoc power"),
    ("There was a trend towards higher biomass.", "hedge", "trend towards"),
    ("Yield was marginally higher (p = .143).", "hedge", "marginally higher"),
    (
        "Yield was marginally significantly higher; it was marginally significant.",
        "hedge",
        "marginally significant",
    ),
    ("The difference approached statistical significance.", "hedge", "approached statistical significance"),
    ("The result just failed to reach significance.", "hedge", "just failed to reach significance"),
    ("Drainage increases earthworm biomass.", "causal", "increases"),
    ("Drainage prevents loss.", "causal", "prevents"),
    ("Biomass was reduced by drainage.", "causal", "reduced"),
    ("Wet soil leads to fewer seedlings.", "causal", "leads to"),
    ("The gain is due to drainage.", "causal", "due to"),
    ("The effect of drainage on biomass is 4.2 g/m2.", "causal", "effect of drainage on"),
    ("Yield was statistically significantly higher.", "statistical-significance", "statistically significantly"),
    (
        "The probability that the result is due to chance is 3.4 %.",
        "p-as-probability",
        "probability that the result is due to chance",
    ),
    (
        "The likelihood of it being due to pure luck is small.",
        "p-as-probability",
        "likelihood of it being due to pure luck",
    ),
    ("There is little risk that it arose by chance.", "p-as-probability", "risk that it arose by chance"),
    (
        "The probability of this occurring by chance is 3.4 %.",
        "p-as-probability",
        "probability of this occurring by chance",
    ),
    ("The odds that it is a fluke are small.", "p-as-probability", "odds that it is a fluke"),
    ("The probability of a chance finding is 3.4 %.", "p-as-probability", "probability of a chance finding"),
    (
        "The rise is due to chance with a probability of 3.4 %.",
        "p-as-probability",
        "due to chance with a probability",
    ),
    (
        "The probability that the null hypothesis is true is 3.4 %.",
        "p-as-probability",
        "probability that the null hypothesis is true",
    ),
    ("The probability of H0 is 3.4 %.", "p-as-probability", "probability of H0 is"),
    (
        "The null hypothesis is false with a probability of 96.6 %.",
        "p-as-probability",
        "null hypothesis is false with a probability",
    ),
    (
        "The null hypothesis has a 3.4 % chance of being true.",
        "p-as-probability",
        "null hypothesis has a 3.4 % chance of being true",
    ),
    (
        "The probability that there is no effect is 3.4 %.",
        "p-as-probability",
        "probability that there is no effect",
    ),
    (
        "The probability that the effect is real is 96.6 %.",
        "p-as-probability",
        "probability that the effect is real",
    ),
    ("The risk of error is 3.4 %.", "p-as-probability", "risk of error is 3.4"),
    ("The chance of being wrong is only 3.4 %.", "p-as-probability", "chance of being wrong is only 3.4"),
    ("There is a 3.4 % risk of error.", "p-as-probability", "a 3.4 % risk of error"),
    ("We are 96.6 % confident that drainage works.", "p-as-probability", "are 96.6 % confident that"),
    ("There is a 96.6 % probability that drainage works.", "p-as-probability", "a 96.6 % probability that"),
    ("A worthwhile lift in conversion.", "importance", "worthwhile"),
    ("The reduction is clinically relevant.", "importance", "clinically relevant"),
    ("Biomass differed significantly.", "significant", "significantly"),
    ("The difference is highly significant.", "significant", "highly significant"),
    ("This proves that drainage works.", "strength", "proves"),
    ("There is no doubt that drainage matters.", "strength", "no doubt that"),
    ("There is overwhelming evidence for a rise.", "strength", "overwhelming evidence"),
    ("We have strong evidence that yields rose.", "strength", "strong evidence"),
    ("There is moderate evidence of a rise.", "strength", "moderate evidence"),
]


@pytest.mark.parametrize(("text", "kind", "quote"), FLAGGED)
def test_sentences_that_need_more_than_a_result(text: str, kind: str, quote: str) -> None:
    assert [each for each in found(text) if each.phrase.kind == kind and each.quote.startswith(quote)], kinds(text)


CAREFUL = [
    "Same-day delivery had a shorter median time.",
    "The test for trend (Cochran–Armitage) gave p = 0.03.",
    "Trend analysis of the time series gave a slope of 0.2 per year.",
    "The upward trend in catches was 2 % a year.",
    "No effect modification was planned.",
    "The effect size was 0.4, and no effect sizes were pooled.",
    "No difference in yield was found.",
    "We found no difference between the two soils.",
    "We found no evidence of a difference.",
    "The hypothesis of no effect was not rejected.",
    "It is unclear whether drainage has no effect.",
    "There is no evidence that there is no effect.",
    "Absence of evidence is not evidence of absence.",
    "The yields did not differ significantly.",
    "The data do not show that there is no effect.",
    "No change was made to the protocol.",
    "The interval includes no effect.",
    "The instrument was the same for all sites.",
    "Acid was handled as remains safe practice.",
    "The dose is equivalent to 5 mg per day.",
    "The plots were the same plots as in 2030.",
    "The safety outcome was bleeding within 30 days.",
    "No adverse events were observed in 40 animals.",
    "No risk difference was registered.",
    "It is safe to assume that counts are independent.",
    "The vaccine cannot be called safe on these data.",
    "No regression model was fitted.",
    "No regression was fitted.",
    "No loss of data occurred.",
    "Yield rose in sand but not significantly.",
    "The effect was measured only in spring.",
    "Plots differ in size but not at random.",
    "The method works only in theory.",
    "The benefit is seen only where it was registered.",
    "Yields only slightly improved.",
    "We tested for a trend to higher yields.",
    "There is a downward trend toward lower prices.",
    "A trend toward earlier flowering over 40 years was fitted.",
    "We removed the trend toward warmer winters.",
    "The method works not only in sand.",
    "Only 3 of 20 plots improved.",
    "Power for the registered effect was 80 %.",
    "The observed power consumption was 4.1 kW.",
    "The increase is associated with rainfall.",
    "Wet plots had reduced cover.",
    "Prices increased over the decade.",
    "Causes of death were coded twice.",
    "Three plots were excluded due to flooding.",
    "The results in Table 2 are adjusted means.",
    "Fixed effects of site on intercepts were included.",
    "Values are given to three significant figures.",
    "The rise was significant at the 5 % level.",
    "Biomass was significantly higher (t = 3.1, p = 0.003).",
    "The difference was not significant.",
    "The minimal clinically important difference is 4 points.",
    "The lift is not worthwhile.",
    "The proof-of-concept study had 20 plots.",
    "The pilot proved useful.",
    "The data do not prove that drainage works.",
    "The evidence is weak.",
    "Non-significant results are listed in the appendix.",
    "Biomass was 4.2 g/m2 higher in drained plots (95 % interval 0.34 to 8.06).",
    "The waterproof sensor was cheaper.",
    "No difference in soil type existed at baseline; biomass was higher by 4.2.",
    "At baseline there was no difference in soil type, and biomass rose.",
    "The groups were similar at baseline.",
    "Baseline characteristics were similar in both groups.",
    "Before treatment the two groups did not differ.",
    "Age and sex were comparable between arms.",
    "The sample sizes were equal in all arms.",
    "The device is similar to a rain gauge.",
    "Yields were similar to those of earlier studies.",
    "Results were similar when plots by the road were left out.",
    "In the sensitivity analysis yields were similar.",
    "With an even prior the risk that there is no effect is 17 %.",
    "The p-value is not the probability that the result is due to chance.",
    "The probability that such a result is due to chance if there were no effect is 3.4 %.",
    "If nothing was done, the probability that it is a fluke is high.",
    "The chance that data this extreme arise by chance is 3.4 %.",
    "The posterior probability that the null hypothesis is true is 3.4 %.",
    "The probability that the null hypothesis is true was set at 0.5.",
    "The risk of error was set at 5 %.",
    "The probability of rejecting the null hypothesis was 80 %.",
    "We are 95 % confident that the interval contains the mean.",
    "Drained plots had 4.2 g more, due to chance or to drainage.",
    "The odds ratio was 1.2, which may be due to chance.",
    "The risk of death was lower, possibly due to chance.",
    "The false positive risk is 20.7 %.",
    "Biomass increased by 4.2 g.",
    "Biomass increased 4.2 g on drained plots.",
    "Yield improved considerably.",
    "Yield was reduced by about 4.2 g.",
    "Survival was improved in spring.",
    "Reduced tillage plots had more worms. Increased light went with more.",
    "Because of missing data two plots were left out.",
    "Wet soil causes no rot and leads to nothing.",
    "It resulted in little change.",
    "The proven reserves were 4.2.",
    "The proved and probable reserves were 4.2.",
    "Marginal means differed by 4.2 g.",
    "Sinceritas causa valet.",
]


@pytest.mark.parametrize("text", CAREFUL)
def test_careful_sentences_are_let_be(text: str) -> None:
    assert [(each.phrase.kind, each.quote) for each in found(text)] == []


def test_the_corpus_is_large_enough() -> None:
    assert len(FLAGGED) >= 30
    assert len(CAREFUL) >= 30
    assert {kind for _, kind, _ in FLAGGED} == {one["kind"] for one in ENGLISH["phrases"]}


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("Drainage may reduce biomass.", [("causal", True)]),
        ("The data suggest that drainage reduces biomass.", [("causal", True)]),
        ("Drainage may matter. It reduces biomass.", [("causal", False)]),
        ("It may reduce biomass, yet in fact it does reduce biomass.", [("causal", True), ("causal", False)]),
        ("It reduces weeds and may reduce weeds.", [("causal", False), ("causal", True)]),
        (
            "It does reduce weeds and might reduce weeds and it may reduce weeds.",
            [("causal", False), ("causal", True)],
        ),
        ("It does not reduce biomass.", []),
        ("It does no harm and has no effect.", [("no-effect", False), ("safe", False)]),
        ("It does not follow that it has no effect.", []),
        ("It does not only reduce but prevents weeds.", [("causal", False), ("causal", False)]),
        ("It never was doubted by anyone that it reduces weeds.", [("causal", False)]),
    ],
)
def test_what_softens_or_takes_back(text: str, expected: list[tuple[str, bool]]) -> None:
    assert [(each.phrase.kind, each.suggestive) for each in found(text)] == expected


def test_one_thing_said_twice_is_told_once_and_as_it_is_said_plainly() -> None:
    said = found("It perhaps causes rot. It causes rot. It may be that it causes rot.")

    assert [(each.quote, each.suggestive) for each in said] == [("causes", False)]


def test_words_of_a_stronger_kind_are_not_told_again() -> None:
    """A marginal significance is a hedge and no unqualified one."""
    assert kinds("It was marginally significant.") == ["hedge"]
    assert kinds("It was statistically significant.") == ["statistical-significance"]


@pytest.mark.parametrize(
    "text",
    [
        "no ef\u00adfect",
        "NO\u00a0EFFECT",
        "no  \n effect",
        "no *effect*",
        "no “effect”",
        "(no effect)",
        "no _effect_",
        "p=0.4,no effect",
    ],
)
def test_how_it_is_written_does_not_count(text: str) -> None:
    assert kinds(text) == ["no-effect"]


def test_hyphens_of_all_sorts_join() -> None:
    assert kinds("a well‑tolerated feed") == kinds("a well-tolerated feed") == ["safe"]
    assert kinds("no-effect level") == []


@pytest.mark.parametrize("text", ["", " ", "...", "no", "no.", "no, effect", "no. Effect", "🜁 no", "\u0000"])
def test_what_says_nothing(text: str) -> None:
    assert kinds(text) == []


def test_no_text_and_no_language() -> None:
    assert wordings([None, "no effect"], [("en",), ()]) == [(), ()]


@given(st.text(st.sampled_from("no effect.but not in $safe-,’(5 is"), max_size=200) | st.text(max_size=200))
def test_any_text_is_read_and_what_is_quoted_stands_in_it(text: str) -> None:
    for each in found(text):
        assert each.quote in text
        assert each.quote.strip() == each.quote != ""


def test_long_texts_take_no_longer_than_their_length() -> None:
    """Twenty times what is read, of words with which many patterns begin, in less than some seconds."""
    started = time.perf_counter()
    for word in ("no ", "not ", "significant ", "in a ", "trend ", "-", "'", "a-", "increases ", "((", "1.", "no,"):
        assert len(found(word * (400_000 // len(word)))) < 100
    assert time.perf_counter() - started < 60


def test_only_the_head_of_a_text_is_read() -> None:
    assert kinds("x " * 9_995 + "no effect") == ["no-effect"]
    assert kinds("x " * 10_000 + "no effect") == []


@pytest.mark.parametrize("language", sorted(LISTS))
def test_lists_are_well_formed(language: str) -> None:
    document = LISTS[language]

    assert document["language"] == language
    for one in document["phrases"]:
        assert one["needs"].strip() == one["needs"] != ""
        assert set(one) <= {"kind", "needs", "at_least", "patterns", "unless"}
        for pattern in (*one["patterns"], *one.get("unless", ())):
            assert pattern == pattern.casefold()
            assert pattern_of(pattern)
        assert len(set(one["patterns"])) == len(one["patterns"])


@pytest.mark.parametrize("pattern", ["", "..3 effect", "no? effect", "# plots", "$"])
def test_a_pattern_begins_with_a_word(pattern: str) -> None:
    with pytest.raises(ValueError, match="does not begin with a word"):
        pattern_of(pattern)


@pytest.mark.parametrize(
    ("pattern", "text", "expected"),
    [
        ("no effect|effects", "no effects", [(0, 2)]),
        ("no any? effect", "no effect", [(0, 2)]),
        ("no any? effect", "no any effect", [(0, 3)]),
        ("no ..2 effect", "no one two effect", [(0, 4)]),
        ("no ..2 effect", "no one two three effect", []),
        ("no ..2 effect", "no, one (two) effect", [(0, 7)]),
        ("no ..2 effect", "no one. effect", []),
        ("same #", "same 5.3", [(0, 2)]),
        ("same #", "same five", []),
        ("same $", "same", [(0, 1)]),
        ("same $", "same; more", [(0, 1)]),
        ("same in|$", "same in", [(0, 2)]),
        ("same $", "same plots", []),
        ("a|b c", "a c b c a", [(0, 2), (2, 4)]),
    ],
)
def test_elements_of_a_pattern(pattern: str, text: str, expected: list[tuple[int, int]]) -> None:
    """The tokens are counted from the first word."""
    assert [(start - 1, end - 1) for start, end in index_of([pattern]).spans(tokens_of(text))] == expected


def test_a_pattern_may_ask_for_the_head_of_a_sentence() -> None:
    tokens = tokens_of("Reduced doses; reduced, reduced doses. Reduced again")

    assert index_of([".|;|: reduced"]).spans(tokens) == [(0, 2), (3, 5), (8, 10)]
    assert tokens.quote(0, 2) == "Reduced"


def test_the_phrase_of_a_kind() -> None:
    assert phrase_of("strength", "en").at_least is None
    assert phrase_of("difference", "en").needs == "needs a test of the difference between the two effects"
