"""All results of one study."""

from __future__ import annotations

from dataclasses import dataclass

from reanalysis.analysis.prepare import Prepared
from reanalysis.bayesian.result import PosteriorResult
from reanalysis.bayesian.settings import SamplerSettings
from reanalysis.comparison.result import Compared, Status
from reanalysis.frequentist.result import FrequentistFit


@dataclass(frozen=True, slots=True)
class Analysis:
    """All results of one study.

    Attributes
    ----------
    prepared : Prepared
    settings : SamplerSettings
        With the seed that was used.
    frequentist : FrequentistFit
    posteriors : tuple of PosteriorFit or NoPosterior
        One for each prior set, in their order.
    questions : tuple of Compared
    status : Status
    """

    prepared: Prepared
    settings: SamplerSettings
    frequentist: FrequentistFit
    posteriors: tuple[PosteriorResult, ...]
    questions: tuple[Compared, ...]
    status: Status

    @property
    def main(self) -> PosteriorResult:
        """The posterior under the main prior set."""
        return self.posterior(self.prepared.study.spec.model.main_prior)

    def posterior(self, prior_set: str) -> PosteriorResult:
        """The posterior under one prior set (KeyError when there is no such set)."""
        for result in self.posteriors:
            if result.prior_set.name == prior_set:
                return result
        raise KeyError(prior_set)
