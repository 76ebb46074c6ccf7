"""Agreement, its reason, and dependence on the prior."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reanalysis.comparison.compare import agreement, compare, dependence, reason
from reanalysis.comparison.conclude import conclude_posterior
from reanalysis.comparison.result import Conclusion, NoConclusion, PriorReading
from reanalysis.effects.result import NoFrequentistAnswer, NoPosteriorAnswer
from reanalysis.sensitivity.result import NoSweep, PowerScaling

SWEEP = NoSweep("q", "not made here")
NONE = NoConclusion("no")


@pytest.mark.parametrize(
    "one, other, want",
    [
        (("supported", "open"), ("supported", "open"), "agree"),
        (("supported", None), ("supported", None), "agree"),
        (("supported", "open"), ("supported", "contradicted"), "differ on size"),
        (("supported", "open"), ("open", "open"), "differ on direction"),
        (("supported", None), ("contradicted", None), "differ on direction"),
        (("supported", "supported"), ("open", "open"), "differ on both"),
    ],
)
def test_agreement_goes_claim_by_claim(one: tuple[Any, Any], other: tuple[Any, Any], want: str) -> None:
    """Both claims, one or none stand alike; the order of the two sides doesn't matter."""
    assert agreement(Conclusion(*one), Conclusion(*other)) == want
    assert agreement(Conclusion(*other), Conclusion(*one)) == want


def test_opposite_sides_are_no_agreement() -> None:
    """Asked for a difference either way, an increase and a decrease are two answers."""
    above, below = (Conclusion("supported", None, side) for side in ("above", "below"))

    assert agreement(above, below) == "differ on direction"
    assert agreement(above, above) == "agree"


def test_nothing_cannot_be_compared() -> None:
    """A missing conclusion on either side, or on both, is no disagreement."""
    some = Conclusion("open", None)

    assert {agreement(NONE, some), agreement(some, NONE), agreement(NONE, NONE)} == {"cannot be compared"}


def reading(name: str, *conclusion: Any) -> PriorReading:
    """A reading of which only the conclusion counts."""
    answer = NoPosteriorAnswer(name, "no")
    return PriorReading(name, answer, Conclusion(*conclusion) if conclusion else NONE)


@pytest.mark.parametrize(
    "readings, want",
    [
        ([("open", "open"), ("open", "open")], "none"),
        ([("open", None), ("supported", None)], "direction"),
        ([("open", "open"), ("open", "open"), ("open", "contradicted")], "size"),
        ([("open", "open"), ("supported", "open"), ("open", "supported")], "both"),
        ([("open", "open"), ()], "none"),
        ([(), ()], "none"),
    ],
)
def test_dependence_names_what_changes(readings: list[tuple[Any, ...]], want: str) -> None:
    """Only prior sets that gave an answer count."""
    assert dependence([reading(str(i), *one) for i, one in enumerate(readings)]) == want


def reasoned(ask: Any, frequentist: Any, posterior: Any, flat: Any, main: Any) -> str:
    """The reason for an estimate and two posteriors, each given by mean and sd; main may be the flat set."""
    question = ask
    answers = {"flat": posterior(question, *flat, "flat"), "weak": posterior(question, *main, "weak")}
    read = {n: PriorReading(n, a, conclude_posterior(question, a)) for n, a in answers.items()}
    return reason(question, frequentist, read["weak"], read["flat"])


def test_reasons_are_tried_in_order(ask: Any, frequentist: Any, posterior: Any) -> None:
    """No answer first, then agreement, the prior, the bars, and what is left."""
    question = ask("greater", None)
    clear, unclear = frequentist(question, 3.0, 1.0), frequentist(question, 1.8, 1.0)
    main = PriorReading("weak", NoPosteriorAnswer("weak", "no"), NONE)

    assert reason(question, NoFrequentistAnswer("separated", ""), main, None) == "no estimate"
    assert reason(question, clear, main, None) == "no posterior"
    assert reasoned(question, clear, posterior, (3.0, 1.0), (2.7, 1.0)) == "none"
    # The flat set concludes as the interval does (P = .9987); the weak one is unsure (P = .84).
    assert reasoned(question, clear, posterior, (3.0, 1.0), (1.0, 1.0)) == "prior information"
    # z = 1.8: the 95 % interval holds 0, P(> 0) = .964 is enough to act, flat or not.
    assert reasoned(question, unclear, posterior, (1.8, 1.0), (1.8, 1.0)) == "different bars"
    # The interval is decisive at either bar, both posteriors are not: another shape.
    assert reasoned(question, clear, posterior, (1.0, 1.0), (1.0, 1.0)) == "shape of the likelihood"


def test_a_flat_main_set_is_not_explained_by_itself(ask: Any, frequentist: Any, posterior: Any) -> None:
    """With the flat set as the main one, prior information is no reason."""
    question = ask("greater", None)
    flat = posterior(question, 1.8, 1.0, "flat")
    main = PriorReading("flat", flat, conclude_posterior(question, flat))

    assert reason(question, frequentist(question, 1.8, 1.0), main, main) == "different bars"
    agreeing = replace(main, conclusion=Conclusion("open", None))
    assert reason(question, frequentist(question, 1.8, 1.0), agreeing, agreeing) == "none"


@given(
    mean=st.floats(-6.0, 6.0),
    act_when=st.sampled_from([0.8, 0.9, 0.95, 0.99]),
    limit=st.sampled_from([None, 2.0]),
)
@pytest.mark.parametrize("direction", ["greater", "less"])
def test_a_normal_posterior_at_the_estimate_differs_only_by_the_bar(
    ask: Any,
    frequentist: Any,
    posterior: Any,
    direction: str,
    mean: float,
    act_when: float,
    limit: float | None,
) -> None:
    """Where posterior and sampling distribution are the same normal, only the two bars can differ."""
    question = ask(direction, limit, act_when)

    got = reasoned(question, frequentist(question, mean, 1.0), posterior, (mean, 1.0), (mean, 1.0))

    assert got in {"none", "different bars"}


def test_either_direction_at_the_same_bar(ask: Any, frequentist: Any, posterior: Any) -> None:
    """Two-sided questions too: P(|theta| > 2) of .96 acts where the interval still holds 2."""
    question = ask("either", 2.0, 0.95)

    for mean in (3.75, -3.75):
        answer = frequentist(question, mean, 1.0)
        assert reasoned(question, answer, posterior, (mean, 1.0), (mean, 1.0)) == "different bars"
    small = ask("either", 2.0, 0.99)
    answer = frequentist(small, 0.0, 0.9)  # within the band at 95 %, P(in the band) = .974 < .99
    assert reasoned(small, answer, posterior, (0.0, 0.9), (0.0, 0.9)) == "different bars"


def compared(question: Any, frequentist: Any, posterior: Any, sign: float) -> Any:
    """A comparison of three prior sets, all signs changed or not."""
    answers = [
        posterior(question, sign * mean, sd, name)
        for name, mean, sd in (("flat", 3.0, 1.0), ("weak", 2.9, 1.0), ("sceptical", 0.5, 0.6))
    ]
    scaling = PowerScaling(0.1, 0.2, "prior and data both matter")
    return compare(question, frequentist(question, sign * 3.0, 1.0), answers, "weak", (SWEEP, scaling))


def test_a_comparison_holds_both_sides(ask: Any, frequentist: Any, posterior: Any) -> None:
    """Readings keep their order, the main one is picked by name, everything is passed on."""
    got = compared(ask(), frequentist, posterior, 1.0)

    assert [one.prior_set for one in got.readings] == ["flat", "weak", "sceptical"]
    assert got.main is got.readings[1]
    assert got.frequentist_conclusion == got.main.conclusion == Conclusion("supported", "open")
    assert (got.agreement, got.reason, got.dependence) == ("agree", "none", "both")
    assert got.readings[2].conclusion == Conclusion("open", "contradicted")
    assert (got.sweep, got.power_scaling.diagnosis) == (SWEEP, "prior and data both matter")


def test_changing_every_sign_mirrors_the_comparison(ask: Any, frequentist: Any, posterior: Any) -> None:
    """Less of the negative effects concludes, agrees and depends as greater of the effects did."""
    up = compared(ask("greater"), frequentist, posterior, 1.0)
    down = compared(ask("less"), frequentist, posterior, -1.0)
    against = compared(ask("less"), frequentist, posterior, 1.0)

    assert [one.conclusion for one in up.readings] == [one.conclusion for one in down.readings]
    assert up.frequentist_conclusion == down.frequentist_conclusion
    assert (up.agreement, up.reason, up.dependence) == (down.agreement, down.reason, down.dependence)
    assert against.frequentist_conclusion == Conclusion("contradicted", "contradicted")
    assert against.agreement == "agree"
