"""Page 1 against `results.json`: not a number is printed that is not in the file."""

from __future__ import annotations

import math
import re
from typing import Any

import pytest

from reanalysis.report.blocks import Answer, plain_text
from reanalysis.report.context import Context
from reanalysis.report.numbers import MINUS, THIN
from reanalysis.report.results import build_results
from reanalysis.report.sections.answers import answers_section

NUMBER = re.compile(rf"({MINUS}?\d+(?:\.\d+)?)")
FREE = {"1000", "95"}
"""Numbers that are words: “of 1,000 such studies”, the level."""


@pytest.mark.parametrize(
    "study",
    ["sample_data/firmness", "sample_data/storage_rot", "sample_data/spots", "tests/studies/separated"],
)
def test_every_number_is_in_the_results(analysed, study: str) -> None:
    """Each number of the page-1 sentences is a number of results.json, rounded as it is printed."""
    analysis = analysed(study)
    answers = [block for block in answers_section(Context(analysis)).blocks if isinstance(block, Answer)]
    results = build_results(analysis)
    for answer, question in zip(answers, results.questions, strict=True):
        known = allowed_numbers(question, results.study.level)
        parts = [answer.sentence, *(reading.text for reading in answer.readings)]
        for text in map(plain_text, parts):
            plain = re.sub(r"(?<=\d),(?=\d{3})", "", text.replace(THIN, "")).replace("50% core", "")
            plain = re.sub(r"(?<=separated: ).*?(?=\.(?: |$))", "", plain)
            for printed in NUMBER.findall(plain):
                assert printed in FREE or is_rounded(printed, known), (printed, text)


def allowed_numbers(question: Any, level: float) -> list[float]:
    """The numbers that sentences about a question may be made of."""
    parts = [part for part in (question.frequentist, *question.posterior.values()) if part.kind != "absent"]
    values = [value for part in parts for value in part.model_dump().values() if isinstance(value, float)]
    values += [1000.0 * value for value in values]
    values += [math.exp(value) for value in values if abs(value) < 30.0] + [-value for value in values]
    asked = [
        question.act_when,
        1.0 - question.act_when,
        level,
        (1.0 - level) / 2.0,
        question.matters_beyond or 0.0,
    ]
    return (
        values
        + asked
        + [100.0 * value for value in asked]
        + [-value for value in asked]
        + [len(question.posterior), 0.999, 0.001, 0.99, 0.01, 1.0]
    )


def is_rounded(printed: str, known: list[float]) -> bool:
    """Whether a printed number is one of the known ones to its last digit."""
    value = float(printed.replace(MINUS, "-"))
    unit = 10.0 ** -len(printed.partition(".")[2])
    return any(abs(value - one) <= 0.5000001 * unit for one in known)
