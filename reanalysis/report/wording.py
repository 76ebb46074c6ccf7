"""Texts that stand in every report: cautions, glossary, references."""

from __future__ import annotations

from reanalysis.report.numbers import percent

CAUTIONS = (
    (
        "This report supports, and never replaces, the analysis plan or protocol, the local and regulatory "
        "rules that apply, and the judgement of a qualified statistician."
    ),
    "An association is not by itself proof of a cause.",
    "Not for individual medical or safety decisions.",
)
"""Always printed."""

GLOSSARY = (
    (
        "confidence interval",
        (
            "Made by a rule that, over many studies, catches the true effect as often as its level says. It "
            "does not hold the true effect with that probability."
        ),
    ),
    (
        "p-value",
        (
            "How often data at least as far from the null hypothesis would turn up if that hypothesis and "
            "the model were true. It is not the probability of the hypothesis."
        ),
    ),
    ("prior", "What is taken to be known about an effect before the data, as a distribution."),
    ("posterior", "Prior and data together: how credible each size of the effect is afterwards."),
    ("credible interval", "Holds the effect with the stated probability, given model, prior and data."),
    ("prior set", "One complete choice of priors, one for each parameter of the model."),
    (
        "what matters",
        "The smallest effect that would change what is done; stated by the author, in the effect’s own unit.",
    ),
    ("tipping prior", "The prior width at which a probability crosses the one needed to act."),
    (
        "sceptical prior",
        f"Centred at no effect, with {percent(0.05)} probability beyond the smallest effect that matters.",
    ),
)
"""Terms and their meanings."""

REFERENCES = (
    (
        "Betancourt, M. (2016). Diagnosing suboptimal cotangent disintegrations in Hamiltonian Monte Carlo. "
        "arXiv:1604.00695."
    ),
    (
        "Dunn, P. K. and Smyth, G. K. (1996). Randomized quantile residuals. Journal of Computational and "
        "Graphical Statistics 5, 236–244."
    ),
    (
        "Kallioinen, N., Paananen, T., Bürkner, P.-C. and Vehtari, A. (2024). Detecting and diagnosing "
        "prior and likelihood sensitivity with power-scaling. Statistics and Computing 34, 57."
    ),
    (
        "Schuirmann, D. J. (1987). A comparison of the two one-sided tests procedure and the power approach "
        "for assessing the equivalence of average bioavailability. Journal of Pharmacokinetics and "
        "Biopharmaceutics 15, 657–680."
    ),
    (
        "Spiegelhalter, D. J., Freedman, L. S. and Parmar, M. K. B. (1994). Bayesian approaches to "
        "randomized trials. Journal of the Royal Statistical Society A 157."
    ),
    (
        "Vehtari, A., Gelman, A., Simpson, D., Carpenter, B. and Bürkner, P.-C. (2021). Rank-normalization, "
        "folding, and localization: an improved R-hat for assessing convergence of MCMC. Bayesian Analysis "
        "16, 667–718."
    ),
    (
        "Vehtari, A., Simpson, D., Gelman, A., Yao, Y. and Gabry, J. (2024). Pareto smoothed importance "
        "sampling. Journal of Machine Learning Research 25(72)."
    ),
)
"""Sources of the methods used."""
