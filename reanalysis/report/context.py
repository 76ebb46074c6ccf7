"""What every section of a report needs: the analysis, its labels, its decimals, running numbers."""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import count

import numpy as np

from reanalysis.analysis.result import Analysis
from reanalysis.bayesian.result import NoPosterior, PosteriorFit
from reanalysis.effects.result import FrequentistAnswer, PosteriorAnswer, Question
from reanalysis.report import numbers

RATIOS = {"logit": "odds ratio", "log": "rate ratio", "cloglog": "hazard ratio"}
"""What the exponential of a coefficient is called, by link."""


@dataclass(slots=True)
class Numbering:
    """Running numbers of tables and figures."""

    _tables: count[int] = field(default_factory=lambda: count(1))
    _figures: count[int] = field(default_factory=lambda: count(1))

    def table(self) -> int:
        """Return the next table's number."""
        return next(self._tables)

    def figure(self) -> int:
        """Return the next figure's number."""
        return next(self._figures)


@dataclass(frozen=True, slots=True)
class Context:
    """An analysis on its way into a report."""

    analysis: Analysis
    numbering: Numbering = field(default_factory=Numbering)

    @property
    def main_prior(self) -> str:
        """Name of the main prior set."""
        return self.analysis.prepared.study.spec.model.main_prior

    @property
    def level(self) -> str:
        """The level of all intervals, as text."""
        return numbers.level(self.analysis.prepared.study.spec.model.level)

    @property
    def main_fit(self) -> PosteriorFit | None:
        """The posterior under the main prior set, if there is one."""
        main = self.analysis.main
        return None if isinstance(main, NoPosterior) else main

    def label(self, column: int) -> str:
        """Name of a coefficient in tables: the name of the first question about it, else its own."""
        for compared in self.analysis.questions:
            if compared.question.column == column:
                return compared.question.name
        name = self.analysis.prepared.design.columns[column].name
        return f"{name}, at zero predictors" if name == "Intercept" else name

    def ratio(self, value: float) -> str:
        """The exponential of an effect with its name, ``odds ratio 0.48``; empty where it has none."""
        words = RATIOS.get(self.analysis.prepared.design.family.link, "")
        return f"{words} {numbers.ratio(float(np.exp(value)))}" if words else ""

    def ratio_interval(self, low: float, high: float) -> str:
        """Limits of an effect as ratios, ``0.18 to 1.03``; empty where there is no such ratio."""
        if self.analysis.prepared.design.family.link not in RATIOS:
            return ""
        return " to ".join(numbers.ratio(float(np.exp(limit))) for limit in (low, high))


def frequentist_decimals(answer: FrequentistAnswer) -> int:
    """Decimals of a question's frequentist numbers: two significant digits of the standard error."""
    return numbers.choose_decimals(answer.se)


def posterior_decimals(answer: PosteriorAnswer) -> int:
    """Decimals of a question's posterior numbers: as their spread asks and their Monte Carlo error allows."""
    spread = (answer.high - answer.low) / 4.0
    return numbers.choose_decimals(spread, answer.mcse_median, answer.mcse_low, answer.mcse_high)


def limit_words(question: Question) -> str:
    """The smallest effect that matters with its unit, ``2 N``; empty when none was stated."""
    if question.matters_beyond is None:
        return ""
    return numbers.quantity(numbers.given(question.matters_beyond), question.unit)


def change_words(value: float) -> str:
    """What kind of effect a value is: an increase, a decrease."""
    return "an increase" if value > 0.0 else "a decrease"


def asked_words(question: Question) -> str:
    """What the question asks about: an increase, a decrease, a difference."""
    return {"greater": "an increase", "less": "a decrease", "either": "a difference"}[question.direction]
