"""The sentences of page 1: forced by the numbers, never against them, and in plain English."""

from __future__ import annotations

import csv
import re
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from reanalysis.comparison.compare import compare
from reanalysis.comparison.result import Compared, Conclusion
from reanalysis.effects.result import (
    FrequentistAnswer,
    NoFrequentistAnswer,
    NoPosteriorAnswer,
    PosteriorAnswer,
    Question,
    SizeTests,
    TailProbability,
)
from reanalysis.report import sentences
from reanalysis.report.blocks import plain_text
from reanalysis.report.context import Context
from reanalysis.sensitivity.result import NoSweep

NO_ESTIMATE = NoFrequentistAnswer("separated: every crate with film was sound", "merge levels")


def context(link: str = "identity", level: float = 0.95) -> Context:
    """What the sentences need to know of a whole analysis."""
    model = SimpleNamespace(level=level, main_prior="weak")
    design = SimpleNamespace(family=SimpleNamespace(link=link))
    study = SimpleNamespace(spec=SimpleNamespace(model=model))
    return Context(SimpleNamespace(prepared=SimpleNamespace(study=study, design=design), questions=()))


def ask(
    direction: str = "greater", limit: float | None = 2.0, unit: str = "N", act_when: float = 0.95
) -> Question:
    """A question about film."""
    return Question("Film against none", "liner[film]", unit, 1, direction, limit, act_when)


def confidence(question: Question, estimate: float, se: float) -> FrequentistAnswer:
    """The answer of a normal estimate."""
    above, limit = float(stats.norm.sf(0.0, estimate, se)), question.matters_beyond
    p = 2.0 * min(above, 1.0 - above)
    size = None
    if limit is not None:
        up, down = float(stats.norm.cdf(limit, estimate, se)), float(stats.norm.sf(-limit, estimate, se))
        beyond = {"greater": up, "less": down, "either": min(1.0, 2.0 * min(up, down))}[question.direction]
        size = SizeTests(beyond, max(1.0 - up, 1.0 - down))
    one_sided = {"greater": 1.0 - above, "less": above, "either": p}[question.direction]
    return FrequentistAnswer(estimate, se, estimate - 1.96 * se, estimate + 1.96 * se, p, one_sided, size)


def posterior(question: Question, prior_set: str, mean: float, sd: float) -> PosteriorAnswer:
    """The answer of a normal posterior."""
    above, limit = float(stats.norm.sf(0.0, mean, sd)), question.matters_beyond
    chances = {"greater": above, "less": 1.0 - above, "either": max(above, 1.0 - above)}
    beyond = negligible = None
    if limit is not None:
        up, down = float(stats.norm.sf(limit, mean, sd)), float(stats.norm.cdf(-limit, mean, sd))
        beyond = TailProbability(
            {"greater": up, "less": down, "either": up + down}[question.direction], 0.001
        )
        negligible = TailProbability(max(0.0, 1.0 - up - down), 0.001)
    return PosteriorAnswer(
        prior_set, mean, mean - 1.96 * sd, mean + 1.96 * sd, mean - 0.67 * sd, mean + 0.67 * sd,
        sd / 60, sd / 30, sd / 30, TailProbability(chances[question.direction], 0.001), beyond, negligible,
    )  # fmt: skip


def pair(question: Question, frequentist: Any, *answers: Any) -> Compared:
    """Compare both sides; the weak prior set is the main one."""
    sweep = NoSweep(question.name, "not needed here")
    return compare(question, frequentist, answers, "weak", (sweep, None))


def normal(question: Question, flat: tuple[float, float], **others: tuple[float, float]) -> Compared:
    """Compare an estimate with posteriors given as mean and standard deviation; flat repeats the estimate."""
    answers = [posterior(question, name, *shape) for name, shape in {"flat": flat, **others}.items()]
    return pair(question, confidence(question, *flat), *answers)


def page(compared: Compared, about: Context) -> dict[str, str]:
    """All sentences about a question."""
    return {
        "headline": sentences.headline(about, compared),
        "frequentist": plain_text(sentences.frequentist_reading(about, compared)),
        "bayesian": plain_text(sentences.bayesian_reading(compared)),
        "agreement": plain_text(sentences.agreement_reading(about, compared)),
        "prior": plain_text(sentences.prior_reading(compared)),
    }


THIN, MINUS = "\u202f", "\u2212"

SURPRISE = "Without any effect, data at least this far from it would turn up"

with (Path(__file__).parent / "headlines.tsv").open(encoding="utf-8") as file:
    HEADLINES = {row["case"]: row for row in csv.DictReader(file, delimiter="\t")}
"""Estimate and weak posterior (mean and standard deviation) with their sentence; ~ is a thin space."""


@pytest.mark.parametrize("case", HEADLINES)
def test_headline(case: str) -> None:
    """Each combination of conclusions has its sentence."""
    row = HEADLINES[case]
    limit = float(row["limit"]) if row["limit"] else None
    question = ask(row["direction"], limit, row["unit"], float(row["act_when"]))
    flat, weak = (tuple(map(float, row[name].split())) for name in ("flat", "weak"))

    found = sentences.headline(context(), normal(question, flat, weak=weak))

    assert found == row["sentence"].replace("~", THIN)


def test_headline_without_an_estimate() -> None:
    """Without a frequentist estimate the headline says whose answer it gives, under which prior."""
    question = ask("less", 0.4, "log-odds")
    compared = pair(question, NO_ESTIMATE, posterior(question, "weak", -2.3, 0.8))

    text = page(compared, context("logit"))

    assert text["headline"].startswith(
        "The data alone give no estimate; with the weak prior there is a decrease of about 2.3"
    )
    assert text["frequentist"] == f"No estimate exists: {NO_ESTIMATE.reason}."
    assert text["agreement"].startswith("They cannot be compared")
    assert text["prior"] == "This cannot be told: fewer than two prior sets gave a posterior."


def test_headline_without_an_estimate_claims_no_more_than_the_posterior() -> None:
    """A posterior that establishes nothing is not reported as an effect."""
    question = ask()
    compared = pair(question, NO_ESTIMATE, posterior(question, "weak", 0.1, 2.0))

    headline = page(compared, context())["headline"]

    assert headline == ("The data alone give no estimate, and with the weak prior the answer stays open.")


def test_headline_without_a_posterior() -> None:
    """Without a posterior nothing is claimed, and no probability is printed anywhere."""
    question = ask()
    compared = pair(
        question, confidence(question, 3.0, 1.0), NoPosteriorAnswer("weak", "it would be improper")
    )

    text = page(compared, context())

    assert text["headline"] == "This question cannot be answered here: there is no trustworthy posterior."
    assert text["bayesian"] == "No posterior: it would be improper."
    assert text["prior"] == "This cannot be told: fewer than two prior sets gave a posterior."
    assert "robability" not in " ".join(text.values())


def test_headline_warns_when_the_prior_decides() -> None:
    """Where prior sets come to different conclusions, the headline itself says so."""
    question = ask(limit=None)
    firm = normal(question, (2.5, 1.0), weak=(2.4, 1.0), sceptical=(2.0, 0.9))
    loose = normal(question, (2.5, 1.0), weak=(2.4, 1.0), sceptical=(0.8, 0.7))

    assert "depends on the prior" not in sentences.headline(context(), firm)
    assert sentences.headline(context(), loose).endswith(" The answer depends on the prior.")
    assert plain_text(sentences.prior_reading(firm)).startswith(
        "No: the conclusions are the same under all 3"
    )
    assert plain_text(sentences.prior_reading(loose)) == (
        "Yes, for the direction: the probability that the effect is above zero goes from 0.87 (sceptical) "
        "to 0.99 (flat)."
    )


@pytest.mark.parametrize(
    ("weak", "sceptical", "sentence"),
    [
        (
            (2.4, 1.0),
            (0.8, 0.9),
            "Yes, for the direction: the probability that the effect is above zero goes from",
        ),
        (
            (4.4, 1.0),
            (2.4, 1.0),
            "Yes, for the size: the probability that the effect is more than ~ goes from",
        ),
        (
            (4.4, 1.0),
            (0.3, 0.9),
            "Yes, for direction and size: the probability that the effect is more than ~",
        ),
        (
            (2.4, 1.0),
            (2.3, 1.0),
            "No: the conclusions are the same under all 3 prior sets. The probability that",
        ),
    ],
)
def test_prior_in_words(weak: tuple[float, float], sceptical: tuple[float, float], sentence: str) -> None:
    """The probability that is quoted is that of the claim which depends on the prior."""
    compared = normal(ask(limit=2.0), weak, weak=weak, sceptical=sceptical)

    assert plain_text(sentences.prior_reading(compared)).startswith(sentence.replace("~", f"2{THIN}N"))


@pytest.mark.parametrize(
    ("estimate", "se", "words"),
    [
        (
            3.5,
            1.0,
            f"p{THIN}<{THIN}0.001. {SURPRISE} in fewer than 1 of",
        ),
        (
            3.0,
            1.0,
            f"p{THIN}={THIN}0.0027. {SURPRISE} in about 3 of",
        ),
        (
            2.0,
            1.0,
            f"p{THIN}={THIN}0.0455. {SURPRISE} in about 46 of",
        ),
        (
            -2.2,
            1.0,
            f"p{THIN}={THIN}0.028. {SURPRISE} in about 28 of",
        ),
        (1.0, 1.0, f"p{THIN}={THIN}0.32. This neither establishes an effect nor shows that there is none."),
    ],
)
def test_p_in_words(estimate: float, se: float, words: str) -> None:
    """A p-value is turned into a frequency, a large one into what it does not show."""
    compared = normal(ask(limit=None), (estimate, se), weak=(estimate, se))

    assert words in page(compared, context())["frequentist"]


@pytest.mark.parametrize(
    ("direction", "mean", "sign", "beyond"),
    [
        ("greater", 3.0, "above zero", f"is more than 2{THIN}N"),
        ("greater", -3.0, "above zero", f"is more than 2{THIN}N"),
        ("less", -3.0, "below zero", f"is below {MINUS}2{THIN}N"),
        ("less", 3.0, "below zero", f"is below {MINUS}2{THIN}N"),
        ("either", 3.0, "above zero", f"is more than 2{THIN}N either way"),
        ("either", -3.0, "below zero", f"is more than 2{THIN}N either way"),
    ],
)
def test_probabilities_say_what_they_are_of(direction: str, mean: float, sign: str, beyond: str) -> None:
    """The sign and the size that a probability is about follow from the question, not from the estimate."""
    compared = normal(ask(direction), (mean, 2.0), weak=(mean, 2.0))

    text = page(compared, context())["bayesian"]

    toward = {"greater": mean, "less": -mean, "either": abs(mean)}[direction]
    likely = "0.93" if toward > 0 else "0.07"
    assert text.startswith(f"Probability {likely} that the effect is {sign}, and 0.")
    assert f"that it {beyond}. 0.95 is needed to act: not reached." in text


@pytest.mark.parametrize(
    ("link", "words"),
    [("logit", "odds ratio 0.41"), ("log", "rate ratio 0.41"), ("identity", ""), ("probit", "")],
)
def test_ratio_of_a_logarithm(link: str, words: str) -> None:
    """On a logarithmic scale the ratio stands beside the effect, with its limits; elsewhere there is none."""
    compared = normal(ask("less", None, ""), (-0.9, 0.2), weak=(-0.9, 0.2))

    text = page(compared, context(link))

    assert ("ratio" in text["headline"]) == bool(words)
    assert words in text["headline"]
    assert (f" ({words}, 0.27 to 0.60)" in text["frequentist"]) == bool(words)


def test_bars_are_explained() -> None:
    """Where only the bars differ, the sentence says which one asks more, by how much."""
    easier = normal(ask("less", None), (-1.8, 1.0), weak=(-1.8, 1.0))
    harder = normal(ask(limit=None, act_when=0.999), (2.5, 1.0), weak=(2.5, 1.0))

    assert (
        f"leaves 5{THIN}% for error and asks less than a 95{THIN}% confidence interval"
        in page(easier, context())["agreement"]
    )
    assert f"leaves 0.1{THIN}% for error and asks more than" in page(harder, context())["agreement"]
    assert f"leaves 2.5{THIN}%." in page(easier, context())["agreement"]


def test_prior_is_blamed_when_it_decides() -> None:
    """Where the flat prior set sides with the confidence interval, the main prior makes the difference."""
    compared = normal(ask(limit=None), (2.5, 1.0), weak=(0.5, 0.6))

    assert page(compared, context())["agreement"] == (
        "Not on the direction. The weak prior makes the difference: without prior information the Bayesian "
        "conclusion is the frequentist one."
    )


@st.composite
def comparisons(draw: st.DrawFn) -> tuple[Compared, Context]:
    """Any question, estimate and posteriors, consistent or not."""
    direction = draw(st.sampled_from(["greater", "less", "either"]))
    limit, unit = draw(st.sampled_from([None, 0.5, 2.0, 30.0])), draw(st.sampled_from(["", "N", "N per day"]))
    question = ask(direction, limit, unit, draw(st.sampled_from([0.6, 0.9, 0.95, 0.999])))
    mean, sd = st.floats(-12.0, 12.0), st.floats(0.01, 9.0)
    sets = {name: posterior(question, name, draw(mean), draw(sd)) for name in ("flat", "weak", "sceptical")}
    missing = draw(st.sets(st.sampled_from(["flat", "weak", "sceptical", "estimate"]), max_size=2))
    answers = [
        NoPosteriorAnswer(name, "it would be improper") if name in missing else one
        for name, one in sets.items()
    ]
    frequentist = NO_ESTIMATE if "estimate" in missing else confidence(question, draw(mean), draw(sd))
    return pair(question, frequentist, *answers), context(draw(st.sampled_from(["identity", "logit", "log"])))


@given(comparisons())
def test_sentences_are_english(drawn: tuple[Compared, Context]) -> None:
    """Whatever the numbers: whole sentences, single spaces, no inside of ours, no probability of 0 or 1."""
    for text in page(*drawn).values():
        assert text.endswith(".")
        assert text[0].isupper()
        for fault in (
            r"  ",
            r"None|nan|inf\b|\{|\}",
            r" [.,;:]",
            r"\.\.",
            r"\(\)",
            r"leaves open it",
            r"\ba increase",
        ):
            assert not re.search(fault, text), text
        assert not re.search(
            r"\b(?:probability|to|from|is)\s(?:0|1|0\.0+|1\.0+)\s(?:that|\(|under)", text, re.IGNORECASE
        ), text
        assert text.count("(") == text.count(")")


@given(comparisons())
def test_headline_never_contradicts_the_numbers(drawn: tuple[Compared, Context]) -> None:
    """What the headline claims is what both conclusions support, no more."""
    compared, about = drawn
    text, ours, theirs = (
        sentences.headline(about, compared),
        compared.main.conclusion,
        compared.frequentist_conclusion,
    )
    both = isinstance(ours, Conclusion) and isinstance(theirs, Conclusion)

    assert ("part:" in text) == (both and ours != theirs)
    if "Both analyses find an increase" in text:
        assert compared.main.answer.median > 0.0
        assert compared.frequentist.estimate > 0.0
    if "Both analyses find a decrease" in text:
        assert compared.main.answer.median < 0.0
        assert compared.frequentist.estimate < 0.0
    if re.search(r", more than the .* that matters", text):
        assert ours.size == theirs.size == "supported"
        assert compared.frequentist.size.p_beyond < 0.05
    if ", but less than the" in text:
        assert ours.size == theirs.size == "contradicted"
    if "Neither analysis" in text:
        assert ours.direction == theirs.direction == "open"
    if "the opposite of what was asked" in text:
        assert ours.direction == theirs.direction == "contradicted"
    if not both:
        assert "analyses find" not in text
        assert "Both" not in text
    assert ("depends on the prior" in text) <= (compared.dependence != "none")


@given(comparisons())
def test_readings_agree_with_the_conclusions(drawn: tuple[Compared, Context]) -> None:
    """“Reached”, “yes” and “no” are said exactly when the conclusions say so."""
    compared, about = drawn
    text = page(compared, about)
    ours = compared.main.conclusion

    if isinstance(ours, Conclusion):
        assert ("act: reached." in text["bayesian"]) == ours.act
        assert ("act: not reached." in text["bayesian"]) == (not ours.act)
    assert text["agreement"].startswith("Yes") == (compared.agreement == "agree")
    assert text["agreement"].startswith("Not") == compared.agreement.startswith("differ")
    if isinstance(compared.frequentist_conclusion, Conclusion):
        low, high = compared.frequentist.low, compared.frequentist.high
        assert ("neither establishes an effect" in text["frequentist"]) == (low < 0.0 < high)
    answered = sum(isinstance(one.answer, PosteriorAnswer) for one in compared.readings)
    if answered >= 2:
        assert text["prior"].startswith("No: ") == (compared.dependence == "none")
