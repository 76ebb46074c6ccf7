"""A question's answer from each of the two fits."""

from __future__ import annotations

from dataclasses import dataclass

from reanalysis.study.spec import Direction


@dataclass(frozen=True, slots=True)
class Question:
    """A question about one coefficient, tied to the design.

    Attributes
    ----------
    name : str
        As the author wrote it.
    effect : str
        Public column name.
    unit : str
        Unit of the effect.
    column : int
        Position of the design column.
    direction : str
        ``greater``, ``less`` or ``either``.
    matters_beyond : float or None
        Smallest effect that matters, positive, in `unit`; None when the author stated none.
    act_when : float
        Posterior probability needed to act.
    """

    name: str
    effect: str
    unit: str
    column: int
    direction: Direction
    matters_beyond: float | None
    act_when: float


@dataclass(frozen=True, slots=True)
class SizeTests:
    """Tests against the smallest effect that matters.

    Attributes
    ----------
    p_beyond : float
        One-sided p of "the effect is no larger than what matters" (minimum-effect test); for
        direction ``either`` twice the smaller of both sides, at most 1.
    p_equivalence : float
        p of "the effect is at least as large as what matters, either way" (two one-sided tests,
        Schuirmann 1987); small means: too small to matter.
    """

    p_beyond: float
    p_equivalence: float


@dataclass(frozen=True, slots=True)
class FrequentistAnswer:
    """The frequentist answer to a question.

    Attributes
    ----------
    estimate, se, low, high : float
        With the confidence interval at the study's level.
    p : float
        Two-sided, of no effect.
    p_direction : float
        One-sided, of "no effect or one in the other direction"; the two-sided p for ``either``.
    size : SizeTests or None
        None when no smallest effect that matters was stated.
    """

    estimate: float
    se: float
    low: float
    high: float
    p: float
    p_direction: float
    size: SizeTests | None


@dataclass(frozen=True, slots=True)
class NoFrequentistAnswer:
    """No estimate exists; `reason` is a clause for the reader."""

    reason: str
    advice: str


@dataclass(frozen=True, slots=True)
class TailProbability:
    """A posterior probability with its Monte Carlo standard error."""

    value: float
    mcse: float


@dataclass(frozen=True, slots=True)
class PosteriorAnswer:
    """The answer to a question under one prior set.

    Attributes
    ----------
    prior_set : str
    median, low, high, core_low, core_high : float
        Equal-tailed at the study's level, and 50 %.
    mcse_median, mcse_low, mcse_high : float
    direction : TailProbability
        That the effect has the asked sign; for ``either`` the larger of both signs.
    beyond : TailProbability or None
        That it exceeds what matters (in the asked direction; either way for ``either``).
    negligible : TailProbability or None
        That it is smaller than what matters, either way.
    """

    prior_set: str
    median: float
    low: float
    high: float
    core_low: float
    core_high: float
    mcse_median: float
    mcse_low: float
    mcse_high: float
    direction: TailProbability
    beyond: TailProbability | None
    negligible: TailProbability | None


@dataclass(frozen=True, slots=True)
class NoPosteriorAnswer:
    """The prior set gave no posterior; `reason` is a clause for the reader."""

    prior_set: str
    reason: str


FrequentistResult = FrequentistAnswer | NoFrequentistAnswer
PosteriorResultForQuestion = PosteriorAnswer | NoPosteriorAnswer
