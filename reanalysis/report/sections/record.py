"""Section 10: for the record."""

from __future__ import annotations

from importlib.metadata import version

from reanalysis.report import numbers, tables
from reanalysis.report.blocks import (
    Block,
    Code,
    Definition,
    Definitions,
    Listing,
    Section,
    Subheading,
)
from reanalysis.report.context import Context
from reanalysis.report.results import library_versions
from reanalysis.report.sections.answers import rows_words
from reanalysis.report.sections.side_by_side import likelihood_words
from reanalysis.report.wording import CAUTIONS, GLOSSARY, REFERENCES


def record_section(context: Context) -> Section:
    """Methods, data, software, glossary, priors, references, cautions."""
    blocks: list[Block] = [
        Code("Methods, ready to paste", methods_paragraph(context), "prose"),
        Subheading("Data and software"),
        Definitions(_sources(context)),
        Subheading("Words"),
        Definitions(tuple(Definition(term, text) for term, text in GLOSSARY)),
        Subheading("Priors"),
        tables.priors_in_full(context),
        Subheading("References"),
        Listing(REFERENCES),
        Subheading("Cautions"),
        Listing((" ".join(CAUTIONS),)),
    ]
    return Section("record", "For the record", tuple(blocks))


def methods_paragraph(context: Context) -> str:
    """Describe both analyses as a methods section would."""
    return " ".join((_model_words(context), _sampler_words(context), _prior_words(context)))


def _model_words(context: Context) -> str:
    analysis = context.analysis
    design = analysis.prepared.design
    method = {
        "OLS": "ordinary least squares (t intervals)",
        "GLM": "maximum likelihood (Wald z intervals, expected information)",
    }[analysis.frequentist.method]
    return (
        f"The model {design.formula} ({likelihood_words(context)}) was fitted to "
        f"{numbers.count(design.rows.used)} of {numbers.count(design.rows.read)} rows by {method} with "
        f"statsmodels {version('statsmodels')}, and with the same design matrix and likelihood as a "
        f"Bayesian model with bambi {version('bambi')}."
    )


def _sampler_words(context: Context) -> str:
    settings = context.analysis.settings
    return (
        f"Posteriors were sampled by the No-U-Turn sampler of nutpie {version('nutpie')} "
        f"({numbers.count(settings.chains)} chains of {numbers.count(settings.draws)} draws after "
        f"{numbers.count(settings.tune)} tuning draws, target acceptance "
        f"{numbers.given(settings.target_accept)}, seed {settings.seed}); convergence was judged by "
        "rank-normalised R-hat, bulk and tail effective sample size, divergent transitions and E-BFMI."
    )


def _prior_words(context: Context) -> str:
    sets = ", ".join(prior_set.name for prior_set in context.analysis.prepared.prior_sets)
    return (
        f"Confidence intervals and equal-tailed credible intervals are at {context.level}. Prior sets: "
        f"{sets}; headline numbers use {context.main_prior}; every prior is listed with its source. "
        "Sensitivity to the prior was examined across the prior sets, by varying the width of each "
        "questioned effect’s prior with Pareto-smoothed importance sampling, and by power-scaling."
    )


def _sources(context: Context) -> tuple[Definition, ...]:
    prepared = context.analysis.prepared
    versions = ", ".join(f"{name} {number}" for name, number in library_versions().items())
    items = [
        Definition("data file", f"{prepared.source.name}, {numbers.file_size(prepared.source.size)}"),
        Definition("its SHA-256", prepared.source.sha256),
        Definition("rows", rows_words(context)),
    ]
    items += [Definition("note", note) for note in prepared.source.notes]
    items += [
        Definition("study file", prepared.study.path.name),
        Definition("its SHA-256", prepared.study.sha256),
        Definition("software", versions),
    ]
    return tuple(items)
