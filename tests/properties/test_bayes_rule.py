"""Prior times likelihood, in the smallest case that everybody knows."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
from scipy import special

from reanalysis.bayesian.log_density import log_likelihood
from reanalysis.bayesian.result import Draws


def test_a_positive_finding_of_a_rare_thing_is_mostly_false(design_of: Callable[..., Any]) -> None:
    """With 99 % sensitivity, 5 % false positives and 1 case in 1,000: about 2 % (common practice)."""
    # Two states of the world as two "draws" of the log-odds of a positive finding.
    log_odds = special.logit(np.array([0.99, 0.05]))
    draws = Draws(log_odds.reshape(1, 2, 1), np.empty((1, 2, 0)))
    design = design_of(pd.DataFrame({"positive": [1.0, 0.0]}), "positive ~ 1", "bernoulli")
    # The design needs both outcomes; what the negative finding adds is taken off again.
    positive = log_likelihood(draws, design) - np.log1p(-special.expit(log_odds))
    weights = np.array([0.001, 0.999]) * np.exp(positive)
    np.testing.assert_allclose(weights[0] / weights.sum(), 0.01943463, rtol=1e-6)
