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
    Table,
    TableColumn,
)
from reanalysis.report.context import Context
from reanalysis.report.sections.answers import rows_words
from reanalysis.report.sections.side_by_side import likelihood_words
from reanalysis.report.wording import CAUTIONS, GLOSSARY, REFERENCES

LIBRARIES = ("statsmodels", "bambi", "pymc", "nutpie", "arviz-stats", "numpy", "scipy", "pandas")
"""Libraries whose versions can move a number."""


def record_section(context: Context) -> Section:
    """Methods, data, priors, software, glossary, references, cautions."""
    blocks: list[Block] = [
        Code("Methods, ready to paste", methods_paragraph(context), "prose"),
        Subheading("Data"),
        Definitions(_data(context)),
        Subheading("Priors"),
        tables.priors_in_full(context),
        Subheading("Software"),
        _software(context),
        Subheading("Words"),
        Definitions(tuple(Definition(term, text) for term, text in GLOSSARY)),
        Subheading("References"),
        Listing(REFERENCES),
        Subheading("Cautions"),
        Listing(CAUTIONS),
    ]
    return Section("record", "For the record", tuple(blocks))


def methods_paragraph(context: Context) -> str:
    """Describe both analyses as a methods section would."""
    analysis = context.analysis
    fit, settings, design = analysis.frequentist, analysis.settings, analysis.prepared.design
    method = (
        "ordinary least squares (t intervals)"
        if fit.method == "OLS"
        else ("maximum likelihood (Wald z intervals, expected information)")
    )
    sets = ", ".join(prior_set.name for prior_set in analysis.prepared.prior_sets)
    return (
        f"The model {design.formula} ({likelihood_words(context)}) was fitted to {numbers.count(design.rows.used)} of "
        f"{numbers.count(design.rows.read)} rows by {method} with statsmodels {version('statsmodels')}, and with the "
        f"same design matrix and likelihood as a Bayesian model with bambi {version('bambi')}, sampled by the "
        f"No-U-Turn sampler of nutpie {version('nutpie')} ({settings.chains} chains of "
        f"{numbers.count(settings.draws)} draws after {numbers.count(settings.tune)} tuning draws, target acceptance "
        f"{numbers.given(settings.target_accept)}, seed {settings.seed}). Confidence intervals and equal-tailed credible "
        f"intervals are at {context.level}. Prior sets: {sets}; headline numbers use {context.main_prior}. Every prior is "
        "listed in full with its source. Sensitivity to the prior was examined across the prior sets, by varying the "
        "width of each questioned effect’s prior with Pareto-smoothed importance sampling, and by power-scaling. "
        "Convergence was judged by rank-normalised R-hat, bulk and tail effective sample size, divergent transitions "
        "and E-BFMI."
    )


def _data(context: Context) -> tuple[Definition, ...]:
    prepared = context.analysis.prepared
    items = [
        Definition("file", f"{prepared.source.name}, {numbers.file_size(prepared.source.size)}"),
        Definition("SHA-256", prepared.source.sha256),
        Definition("rows", rows_words(context)),
        Definition("study file", f"{prepared.study.path.name}, SHA-256 {prepared.study.sha256}"),
    ]
    items += [Definition("note", note) for note in prepared.source.notes]
    return tuple(items)


def _software(context: Context) -> Table:
    rows = [(name, version(name)) for name in ("reanalysis", *LIBRARIES)]
    return Table(
        number=context.numbering.table(),
        caption="What computed these numbers.",
        columns=(TableColumn("package"), TableColumn("version")),
        rows=tuple(rows),
    )
