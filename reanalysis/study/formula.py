"""A model formula, checked against an allow-list before anything evaluates it.

In every formula library a formula is executable code. Here it is read by a
parser of our own, which knows columns, a few operators and a few named
functions and nothing else, and is expanded to a plain list of terms. What goes
to a formula library later is rendered anew from that list.

Grammar::

    formula     = response "~" sum
    response    = column | ("log" | "log1p" | "sqrt") "(" column ")"
    sum         = ["-" "1"] product {("+" | "-") product}
    product     = interaction {("*" | "/") interaction}
    interaction = power {":" power}
    power       = atom ["**" integer]                 (the atom is a sum in parentheses)
    atom        = column | call | "(" sum ")" | "0" | "1"
    call        = simple "(" argument ")"             (one of `SIMPLE_FUNCTIONS`)
                | "poly" "(" argument "," ["degree" "="] integer ")"
                | "bs" "(" argument "," ["df" "="] integer ["," "degree" "=" integer] ")"
                | "C" "(" column ")"
    argument    = column | simple "(" column ")"
    column      = identifier | "`" any signs "`"

The operators mean what they do in the notation of Wilkinson and Rogers (1973):
``a * b`` is ``a + b + a:b``, ``a / b`` is ``a + a:b``, ``(a + b)**2`` is all
terms up to two-way interactions, ``-`` takes a term out again. An intercept is
in the model unless ``0`` or ``-1`` takes it out.

References
----------
Wilkinson, G. N. and Rogers, C. E. (1973). Symbolic description of factorial
models for analysis of variance. Applied Statistics 22, 392-399.
"""

from __future__ import annotations

from reanalysis.study.formula_parser import Parser
from reanalysis.study.formula_terms import (
    FUNCTIONS,
    RESPONSE_FUNCTIONS,
    SIMPLE_FUNCTIONS,
    Call,
    Column,
    Factor,
    FormulaParts,
    Term,
)

__all__ = [
    "FUNCTIONS",
    "RESPONSE_FUNCTIONS",
    "SIMPLE_FUNCTIONS",
    "Call",
    "Column",
    "Factor",
    "FormulaParts",
    "Term",
    "check_formula",
]


def check_formula(text: str, *, where: str = "model.formula") -> FormulaParts:
    """Read a formula against the allow-list; nothing in it is evaluated.

    Parameters
    ----------
    text : str
        The formula.
    where : str
        How to name the input in an error, such as ``"firmness.toml, line 12, model.formula"``.

    Returns
    -------
    FormulaParts

    Raises
    ------
    FormulaError
        When anything in the formula is not offered; the message shows the formula with the place
        marked.
    """
    return Parser(text, where).parse()
