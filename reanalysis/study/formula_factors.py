"""Read one column or one call of an allowed function."""

from __future__ import annotations

import difflib
from typing import NoReturn

from reanalysis.study.formula_terms import FUNCTIONS, SIMPLE_FUNCTIONS, Call, Column, Factor
from reanalysis.study.formula_tokens import Complaint, Cursor, Token

MAX_DEGREE = 10
MAX_DF = 30

COMPUTE = "compute such a column in the data file"
_TRAPS: dict[str, Complaint] = {
    "offset": Complaint(
        "`offset(...)` is not offered",
        'the key `exposure` with family = "poisson"',
        "remove it and name the exposure column with the `exposure` key",
    ),
    "I": Complaint("`I(...)` holds code, which is not evaluated", "poly(x, 2) for a square", COMPUTE),
    "T": Complaint(
        "`T(...)` is not offered", "C(x)", "set the reference level in `levels` of [data]: the first is it"
    ),
    "S": Complaint("`S(...)` is not offered", "C(x)", "factors are compared with their first level"),
    "factor": Complaint("`factor(...)` is not offered", "C(x)", "write C(x), or declare it in `levels`"),
}
for _name in ("p", "prop", "proportion"):
    _TRAPS[_name] = Complaint(
        f"`{_name}(...)` for successes out of trials is not offered",
        "a two-level response, one row for each trial",
        "put one row for each trial in the data file",
    )


def read_factor(cursor: Cursor) -> Factor:
    """Read a column or a call; the caller has seen that a name comes next."""
    token = cursor.take()
    quoted = cursor.text[token.start] == "`"
    if quoted or not cursor.at("("):
        return Column(token.text)
    if token.text not in FUNCTIONS:
        _refuse_function(cursor, token)
    cursor.take()
    argument = _argument(cursor, token)
    options = _options(cursor, token)
    cursor.expect(")", f"in `{token.text}(...)`")
    return Call(token.text, argument, options)


def _refuse_function(cursor: Cursor, token: Token) -> NoReturn:
    trap = _TRAPS.get(token.text)
    if trap:
        cursor.refuse(token, trap)
    close = difflib.get_close_matches(token.text.lower(), FUNCTIONS, n=1)
    cursor.fail(
        token,
        f"the function `{token.text}` is not offered",
        ", ".join(FUNCTIONS),
        f"did you mean `{close[0]}`?" if close else COMPUTE,
    )


def _argument(cursor: Cursor, function: Token) -> Column | Call:
    token = cursor.peek()
    allowed = "the name of one column" + (
        "" if function.text == "C" else ", or one simple function of it such as log(x)"
    )
    if token.kind != "name":
        cursor.fail(token, f"`{function.text}(...)` needs a column", allowed, COMPUTE)
    argument = read_factor(cursor)
    nested = isinstance(argument, Call)
    simple = (
        isinstance(argument, Call)
        and argument.function in SIMPLE_FUNCTIONS
        and isinstance(argument.argument, Column)
    )
    if nested and (function.text == "C" or not simple):
        cursor.fail(token, f"this cannot stand in `{function.text}(...)`", allowed, COMPUTE)
    if not cursor.at(")", ","):
        cursor.fail(cursor.peek(), f"`{function.text}(...)` takes no arithmetic or code", allowed, COMPUTE)
    return argument


def _options(cursor: Cursor, function: Token) -> tuple[tuple[str, int], ...]:
    limits = {"poly": {"degree": MAX_DEGREE}, "bs": {"df": MAX_DF, "degree": 5}}.get(function.text, {})
    given: dict[str, int] = {}
    while cursor.at(","):
        comma = cursor.take()
        if not limits:
            cursor.fail(comma, f"`{function.text}(...)` takes one column only", "", "remove the rest")
        key, value = _option(cursor, function, limits, first=not given)
        if key in given:
            cursor.fail(value, f"`{key}` is given twice", "", "give it once")
        if value.kind != "integer" or value.text not in map(str, range(1, limits[key] + 1)):
            cursor.fail(
                value, f"`{key}` is not a whole number in its range", f"1 to {limits[key]}", "correct it"
            )
        given[key] = int(value.text)
    _check_options(cursor, function, limits, given)
    return tuple((key, given[key]) for key in limits if key in given)


def _option(cursor: Cursor, function: Token, limits: dict[str, int], *, first: bool) -> tuple[str, Token]:
    names = ", ".join(f"{name}=" for name in limits)
    token = cursor.take()
    if token.kind == "name":
        if token.text not in limits or not cursor.at("="):
            cursor.fail(token, f"`{token.text}` is not an argument of `{function.text}`", names, "correct it")
        cursor.take()
        return token.text, cursor.take()
    if not first:
        cursor.fail(token, "this argument has no name", names, "name it")
    return next(iter(limits)), token


def _check_options(cursor: Cursor, function: Token, limits: dict[str, int], given: dict[str, int]) -> None:
    needed = next(iter(limits), None)
    if needed and needed not in given:
        example = "poly(x, 2)" if function.text == "poly" else "bs(x, df=4)"
        cursor.fail(function, f"`{function.text}` needs `{needed}`", example, "say how flexible the curve is")
    if function.text == "bs" and given["df"] < given.get("degree", 3):
        least = given.get("degree", 3)
        cursor.fail(
            function, f"df = {given['df']} is too small for its degree", f"at least {least}", "raise df"
        )
