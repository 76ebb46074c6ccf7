"""Section 1: the answers, for a reader of page 1."""

from __future__ import annotations

from reanalysis.comparison.result import Compared
from reanalysis.report import numbers, pictures, sentences
from reanalysis.report.blocks import Answer, Lead, Paragraph, Reading, Section, StatusLine
from reanalysis.report.context import Context


def status_line(context: Context) -> StatusLine:
    """Say whether anything should stop the reader from relying on the results."""
    status = context.analysis.status
    if status.verdict == "sound":
        fits = numbers.count(len(context.analysis.posteriors))
        return StatusLine(
            "sound",
            "Nothing here should stop you relying on these results.",
            f"{rows_words(context)} The frequentist fit converged, and the computation is sound under all "
            f"{fits} prior sets. How far each answer depends on the prior is said with it.",
        )
    words = {"doubtful": "Read these results with care.", "failed": "Do not rely on these results."}
    caveats = " ".join(caveat.message for caveat in status.caveats)
    return StatusLine(status.verdict, words[status.verdict], f"{caveats} {rows_words(context)}")


def rows_words(context: Context) -> str:
    """Say how many rows were used, and what the others lacked."""
    rows = context.analysis.prepared.design.rows
    if rows.dropped == 0:
        return f"All {numbers.count(rows.used)} rows were used."
    lacking = ", ".join(f"{name} in {numbers.count(number)}" for name, number in rows.dropped_by if number)
    return f"{numbers.count(rows.used)} of {numbers.count(rows.read)} rows were used; missing: {lacking}."


def answers_section(context: Context) -> Section:
    """One answer a question."""
    study = context.analysis.prepared.study.spec
    blocks: list[Lead | Paragraph | Answer] = []
    if study.context:
        blocks.append(Paragraph(study.context))
    blocks += [_answer(context, compared) for compared in context.analysis.questions]
    if not context.analysis.questions:
        nothing = (
            "The study file asks no question; the two analyses of every coefficient follow side by side."
        )
        blocks.append(Lead(nothing))
    return Section("answer", "Answer", tuple(blocks))


def _answer(context: Context, compared: Compared) -> Answer:
    return Answer(
        heading=compared.question.name,
        sentence=sentences.headline(context, compared),
        picture=pictures.small_pair(context, compared),
        readings=(
            Reading("frequentist", "Frequentist reading", sentences.frequentist_reading(context, compared)),
            Reading("bayesian", "Bayesian reading", sentences.bayesian_reading(compared)),
            Reading("plain", "Do the two agree?", sentences.agreement_reading(context, compared)),
            Reading("prior", "Does the prior matter?", sentences.prior_reading(compared)),
        ),
    )
