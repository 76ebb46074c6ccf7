"""The recursive-descent parser behind `reanalysis.study.formula`, whose docstring has the grammar."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from reanalysis.study.formula_factors import COMPUTE, read_factor
from reanalysis.study.formula_terms import (
    FUNCTIONS,
    RESPONSE_FUNCTIONS,
    Call,
    Column,
    Factor,
    FormulaParts,
    Term,
)
from reanalysis.study.formula_tokens import Cursor, Token

MAX_DEPTH = 20
MAX_TERMS = 200
MAX_POWER = 6


@dataclass(frozen=True, slots=True)
class _Written:
    """A term and how it got there: written out, or made by an operator."""

    term: Term
    outright: bool


_Sum = dict[frozenset[Factor], _Written]


class Parser:
    """Reads one formula, once."""

    def __init__(self, text: str, where: str) -> None:
        self._cursor = Cursor(text, where)
        self._depth = 0
        self._intercept: bool | None = None

    def parse(self) -> FormulaParts:
        """Return the formula's parts.

        Raises
        ------
        FormulaError
            At the first thing that the grammar does not offer.
        """
        response = self._response()
        terms = self._outer_sum()
        self._check_response(response, terms)
        intercept = self._intercept is not False
        if not terms and not intercept:
            self._cursor.fail(
                self._cursor.peek(), "the right-hand side is empty", "", "add a term, or 1 for an intercept"
            )
        ordered = sorted((written.term for written in terms.values()), key=lambda term: len(term.factors))
        return FormulaParts(self._cursor.text, response, intercept, tuple(ordered))

    # Left-hand side

    def _response(self) -> Factor:
        token = self._cursor.peek()
        if token.kind != "name":
            self._cursor.fail(
                token, "the formula does not begin with a response", "response ~ terms", "name the response"
            )
        factor = read_factor(self._cursor)
        plain = isinstance(factor, Column)
        if not plain and not self._offered_response(factor):
            allowed = f"a column, or {', '.join(RESPONSE_FUNCTIONS)} of a column"
            self._cursor.fail(token, "this function cannot be applied to the response", allowed, COMPUTE)
        self._cursor.expect("~", "after the response")
        return factor

    @staticmethod
    def _offered_response(factor: Factor) -> bool:
        return (
            isinstance(factor, Call)
            and factor.function in RESPONSE_FUNCTIONS
            and isinstance(factor.argument, Column)
        )

    def _check_response(self, response: Factor, terms: _Sum) -> None:
        """Refuse the response's column on the right-hand side, where it would explain itself."""
        name = response.columns[0]
        if any(name in written.term.columns for written in terms.values()):
            token = [token for token in self._cursor.tokens if token.kind == "name" and token.text == name][
                -1
            ]
            self._cursor.fail(
                token, f"the response `{name}` is also on the right-hand side", "", "take it out there"
            )

    # Right-hand side

    def _outer_sum(self) -> _Sum:
        terms = self._sum(outer=True)
        token = self._cursor.peek()
        if token.kind != "end":
            advice = "close every parenthesis once" if token.text == ")" else "put an operator between"
            self._cursor.fail(token, f"`{token.text}` is unexpected here", "an operator: + - : * /", advice)
        return terms

    def _sum(self, *, outer: bool) -> _Sum:
        terms: _Sum = {}
        minus = self._cursor.at("-")
        if minus:
            self._cursor.take()
        while True:
            token = self._cursor.peek()
            if token.kind == "integer":
                self._number(self._cursor.take(), minus=minus, outer=outer)
            else:
                operand = self._product()
                if minus:
                    self._remove(terms, operand, token)
                else:
                    self._add(terms, operand, token)
            if not self._cursor.at("+", "-"):
                return terms
            minus = self._cursor.take().text == "-"

    def _number(self, token: Token, *, minus: bool, outer: bool) -> None:
        if token.text not in ("0", "1") or (minus and token.text == "0"):
            self._cursor.fail(token, f"the number {token.text} is not a term", "0, 1 and -1", "remove it")
        if (
            self._cursor.at("*", "/", ":", "**") or not outer
        ):  # looks on first: `1|g` has a message of its own
            self._cursor.fail(
                token, "0 and 1 stand for the intercept", "in the outermost sum", "take it out of here"
            )
        intercept = token.text == "1" and not minus
        if self._intercept is not None and self._intercept != intercept:
            self._cursor.fail(
                token, "the formula has and has not an intercept", "", "keep one of 0, 1 and -1"
            )
        self._intercept = intercept

    def _add(self, terms: _Sum, operand: _Sum, token: Token) -> None:
        for key, written in operand.items():
            earlier = terms.get(key)
            if earlier and earlier.outright and written.outright:
                self._cursor.fail(token, f"the term `{written.term.text}` occurs twice", "", "write it once")
            terms.setdefault(key, written)
        self._check_count(terms, token)

    def _remove(self, terms: _Sum, operand: _Sum, token: Token) -> None:
        for key, written in operand.items():
            if key not in terms:
                self._cursor.fail(
                    token,
                    f"the term `{written.term.text}` cannot be taken out: it is not there",
                    "terms written before the minus sign",
                    "correct the term, or remove it",
                )
            del terms[key]

    def _check_count(self, terms: _Sum, token: Token) -> None:
        if len(terms) > MAX_TERMS:
            self._cursor.fail(
                token, f"the formula has more than {MAX_TERMS} terms", f"at most {MAX_TERMS}", "shorten it"
            )

    def _product(self) -> _Sum:
        left = self._interaction()
        while self._cursor.at("*", "/"):
            operator = self._cursor.take()
            right = self._interaction()
            made: _Sum = {}
            if operator.text == "*":
                parts: Iterable[_Sum] = (left, right, self._cross(left, right, operator))
            else:
                every = tuple(dict.fromkeys(f for written in left.values() for f in written.term.factors))
                whole = {frozenset(every): _Written(Term(every), outright=False)}
                parts = (left, self._cross(whole, right, operator))
            for part in parts:
                for key, written in part.items():
                    made.setdefault(key, _Written(written.term, outright=False))
            self._check_count(made, operator)
            left = made
        return left

    def _interaction(self) -> _Sum:
        left = self._power()
        while self._cursor.at(":"):
            operator = self._cursor.take()
            left = self._cross(left, self._power(), operator)
        return left

    def _cross(self, left: _Sum, right: _Sum, operator: Token) -> _Sum:
        made: _Sum = {}
        for first in left.values():
            for second in right.values():
                shared = [factor for factor in second.term.factors if factor in first.term.factors]
                if shared:
                    name = shared[0].text
                    self._cursor.fail(
                        operator,
                        f"`{name}` would interact with itself",
                        "interactions of different columns",
                        f"write poly({name}, 2) for a square of numbers, or remove one",
                    )
                term = Term(first.term.factors + second.term.factors)
                made.setdefault(term.key, _Written(term, first.outright and second.outright))
            self._check_count(made, operator)
        return made

    def _power(self) -> _Sum:
        parenthesis = self._cursor.at("(")
        base = self._atom()
        if not self._cursor.at("**"):
            return base
        operator = self._cursor.take()
        exponent = self._cursor.take()
        if not parenthesis or len(base) < 2:
            name = next(iter(base.values())).term.text if base else "x"
            self._cursor.fail(
                operator,
                "`**` after a single column does not give its square",
                "`**` after a sum in parentheses, such as (a + b)**2",
                f"write poly({name}, 2) for a square",
            )
        small = [str(number) for number in range(2, MAX_POWER + 1)]
        if exponent.kind != "integer" or exponent.text not in small:
            self._cursor.fail(
                exponent, "`**` needs a small whole number", ", ".join(small), "correct the number"
            )
        if self._cursor.at("**"):
            self._cursor.fail(self._cursor.peek(), "`**` is used twice in a row", "one `**`", "remove one")
        return self._raise(base, int(exponent.text), operator)

    def _raise(self, base: _Sum, exponent: int, operator: Token) -> _Sum:
        made: _Sum = {key: _Written(item.term, outright=False) for key, item in base.items()}
        for _ in range(exponent - 1):
            for first in list(made.values()):
                for second in base.values():
                    factors = tuple(dict.fromkeys(first.term.factors + second.term.factors))
                    made.setdefault(frozenset(factors), _Written(Term(factors), outright=False))
                self._check_count(made, operator)
        return made

    def _atom(self) -> _Sum:
        token = self._cursor.peek()
        if self._cursor.at("("):
            return self._parenthesis()
        if token.kind == "integer":
            self._cursor.fail(
                token, f"the number {token.text} is not a term", "0 and 1 in a sum", "remove it"
            )
        if token.kind != "name":
            self._cursor.fail(
                token,
                f"{token.described} where a term should be",
                f"a column, a sum in parentheses, or one of {', '.join(FUNCTIONS)}",
                "add a term, or remove the operator before this place",
            )
        factor = read_factor(self._cursor)
        term = Term((factor,))
        return {term.key: _Written(term, outright=True)}

    def _parenthesis(self) -> _Sum:
        opening = self._cursor.take()
        self._depth += 1
        if self._depth > MAX_DEPTH:
            self._cursor.fail(
                opening, "parentheses are nested too deeply", f"depth {MAX_DEPTH}", "remove some"
            )
        terms = self._sum(outer=False)
        self._cursor.expect(")", "where the parenthesis should end")
        self._depth -= 1
        return terms
