"""Both readings of a question, whether they agree, and whether the prior matters."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from reanalysis.effects.result import FrequentistResult, PosteriorResultForQuestion, Question
from reanalysis.sensitivity.result import PowerScaling, SweepResult

Standing = Literal["supported", "contradicted", "open"]
"""What an analysis says about a claim."""

Side = Literal["above", "below", "asked"]
"""Where an effect that was sought either way has been found."""

Agreement = Literal["agree", "differ on direction", "differ on size", "differ on both", "cannot be compared"]

Reason = Literal[
    "none", "no estimate", "no posterior", "prior information", "different bars", "shape of the likelihood"
]
"""Why the two analyses differ, as far as the numbers force a reason."""

Dependence = Literal["none", "direction", "size", "both"]
"""Which conclusions change over the prior sets."""


@dataclass(frozen=True, slots=True)
class Conclusion:
    """What one analysis concludes about one question.

    Attributes
    ----------
    direction : str
        Standing of "the effect has the asked sign" (``either``: "there is an effect").
    size : str or None
        Standing of "it is larger than what matters"; None when no such size was stated.
    side : str
        For ``either``: the side of zero that a supported effect is on. ``asked`` otherwise: the
        question says it, or no effect is established.
    """

    direction: Standing
    size: Standing | None
    side: Side = "asked"

    @property
    def act(self) -> bool:
        """Whether the claim that acting depends on is supported: size where stated, else direction."""
        return (self.size or self.direction) == "supported"


@dataclass(frozen=True, slots=True)
class NoConclusion:
    """An analysis that has no answer has no conclusion."""

    reason: str


ConclusionResult = Conclusion | NoConclusion


@dataclass(frozen=True, slots=True)
class PriorReading:
    """The answer under one prior set and what it amounts to."""

    prior_set: str
    answer: PosteriorResultForQuestion
    conclusion: ConclusionResult


@dataclass(frozen=True, slots=True)
class Compared:
    """One question, both ways.

    Attributes
    ----------
    question : Question
    frequentist : FrequentistAnswer or NoFrequentistAnswer
    frequentist_conclusion : Conclusion or NoConclusion
    readings : tuple of PriorReading
        One for each prior set, in the report's order.
    main : PriorReading
        Under the main prior set.
    agreement : str
        Between the frequentist conclusion and the main reading's.
    reason : str
        Why they differ.
    dependence : str
        Which conclusions change over the prior sets that gave an answer.
    sweep : Sweep or NoSweep
    power_scaling : PowerScaling or None
        None when there is no posterior under the main prior set.
    """

    question: Question
    frequentist: FrequentistResult
    frequentist_conclusion: ConclusionResult
    readings: tuple[PriorReading, ...]
    main: PriorReading
    agreement: Agreement
    reason: Reason
    dependence: Dependence
    sweep: SweepResult
    power_scaling: PowerScaling | None


@dataclass(frozen=True, slots=True)
class Caveat:
    """Something that stands between the reader and the results.

    Attributes
    ----------
    severity : str
        ``doubtful`` or ``failed``.
    message : str
        A sentence.
    """

    severity: Literal["doubtful", "failed"]
    message: str


@dataclass(frozen=True, slots=True)
class Status:
    """Whether anything should stop the reader from relying on the report."""

    verdict: Literal["sound", "doubtful", "failed"]
    caveats: tuple[Caveat, ...]
