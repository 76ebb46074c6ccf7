"""Cut a formula into tokens, and word what is refused with the place marked."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from typing import Literal, NoReturn

from reanalysis.errors import FormulaError, Problem

MAX_LENGTH = 2_000
_WINDOW = 60  # signs shown on each side of the marked place

_INTEGER = re.compile(r"[0-9]+")
_OPERATORS = ("**", "+", "-", "*", "/", ":", "(", ")", "~", ",", "=")


@dataclass(frozen=True, slots=True)
class Complaint:
    """What is wrong at a place of the formula; the fields of a `Problem` without the input."""

    found: str
    allowed: str
    advice: str


@dataclass(frozen=True, slots=True)
class Token:
    """A piece of the formula; `text` of a backticked name is without the backticks."""

    kind: Literal["name", "integer", "operator", "end", "refused"]
    text: str
    start: int
    end: int
    complaint: Complaint | None = None

    @property
    def described(self) -> str:
        """Say what was found."""
        return f"found `{self.text}`" if self.kind != "end" else "the formula ends"

    def is_operator(self, *operators: str) -> bool:
        """Whether this is one of the operators (a backticked name may look like one)."""
        return self.kind == "operator" and self.text in operators


_GROUP_TERMS = Complaint(
    "`|` asks for group-level terms, which are not offered",
    "terms for the whole sample",
    "enter the grouping column as a term of its own, such as `+ g`",
)
_BRACES = Complaint("braces hold code, which is not evaluated", "", "compute a column in the data file")
_COMPARISON = Complaint("comparisons are not offered", "", "make a column for it in the data file")
_STRING = Complaint(
    "texts in quotes are not offered",
    "column names; an odd one in backticks, such as `days in store`",
    "remove the quotes, or use backticks for a column's name",
)

_REFUSED: dict[str, Complaint] = {
    "^": Complaint(
        "`^` is not offered",
        "`**` with a small whole number after a sum in parentheses",
        "write poly(x, 2) for a square, (a + b)**2 for all two-way interactions",
    ),
    "|": _GROUP_TERMS,
    "%": Complaint(
        "operators with percent signs such as `%in%` are not offered",
        "+ - : * / ( ) **",
        "write a:b for an interaction, a / b for b nested in a",
    ),
    "[": Complaint("subscripts are not offered", "", "make a column for it in the data file"),
    "]": Complaint("subscripts are not offered", "", "make a column for it in the data file"),
    "{": _BRACES,
    "}": _BRACES,
    '"': _STRING,
    "'": _STRING,
    "@": Complaint("`@` is not offered", "+ - : * / ( ) **", "remove it"),
    "\\": Complaint("a backslash is not offered", "", "remove it"),
    "\n": Complaint("the formula goes on in a new line", "one line", "write the formula in one line"),
    "\r": Complaint("the formula goes on in a new line", "one line", "write the formula in one line"),
    "<": _COMPARISON,
    ">": _COMPARISON,
    "!": _COMPARISON,
}
_EVENT = Complaint(
    "the response has a subscript",
    "a plain column as the response of a two-level outcome",
    'remove the brackets and name the modelled level with the `event` key, such as event = "yes"',
)
_ATTRIBUTE = Complaint(
    "a dot after a name would reach into an object, which is not allowed",
    "plain column names",
    "if the dot belongs to a column's name, put the whole name in backticks",
)
_ALL_OTHERS = Complaint("`.` for all other columns is not offered", "", "name each column")
_DECIMAL = Complaint(
    "decimal numbers are not offered", "whole numbers", "compute such a column in the data file"
)
_HIDDEN = Complaint(
    "names that begin with two underscores are not allowed", "", "rename the column in the data file"
)
_OPEN_QUOTE = Complaint("a backtick is never closed", "", "close it after the column's name")
_ODD_NAME = Complaint(
    "this name in backticks is empty or holds signs that cannot be printed",
    "the name of a column",
    "write the column's name between the backticks",
)


def refuse(text: str, where: str, start: int, end: int, complaint: Complaint) -> NoReturn:
    """Raise the error for one place of a formula.

    Parameters
    ----------
    text : str
        The formula.
    where : str
        The input's name.
    start, end : int
        The place, counted in signs from 0, `end` excluded.
    complaint : Complaint
        What is wrong there.

    Raises
    ------
    FormulaError
        Always.
    """
    left, right = max(0, start - _WINDOW), min(len(text), end + _WINDOW)
    before, marked, after = text[left:start], text[start:end], text[end:right]
    lead, tail = ("..." if left else ""), ("..." if right < len(text) else "")
    line = lead + _one_line(before + marked + after) + tail
    carets = " " * _width(lead + _one_line(before)) + "^" * max(1, min(_width(_one_line(marked)), 40))
    picture = f"\n        {line}\n        {carets}"
    raise FormulaError(Problem(where, complaint.found + picture, complaint.allowed, complaint.advice))


def tokenise(text: str) -> list[Token]:
    """Cut a formula into tokens; ends with an ``end`` token, or a ``refused`` one where it gave up."""
    tokens: list[Token] = []
    position = 0
    while position < len(text):
        if text[position] in " \t":
            position += 1
            continue
        token = _next(text, position, tokens)
        tokens.append(token)
        if token.kind == "refused":
            return tokens
        position = token.end
    tokens.append(Token("end", "", len(text), len(text)))
    return tokens


class Cursor:
    """A place in the tokens of one formula.

    Parameters
    ----------
    text : str
        The formula.
    where : str
        The input's name in errors.
    """

    def __init__(self, text: str, where: str) -> None:
        self.text = text
        self._where = where
        self._next = 0
        self._check_length()
        self.tokens = tokenise(text)

    def _check_length(self) -> None:
        if len(self.text) > MAX_LENGTH:
            found, advice = f"the formula has {len(self.text):,} signs", "shorten it"
            refuse(self.text, self._where, 0, 1, Complaint(found, f"at most {MAX_LENGTH:,}", advice))
        if not self.text.strip():
            complaint = Complaint("the formula is empty", "response ~ terms", "write a formula")
            refuse(self.text, self._where, 0, 0, complaint)

    def peek(self) -> Token:
        """Return the next token; what the tokeniser refused is raised when it is reached."""
        token = self.tokens[self._next]
        if token.complaint:
            self.refuse(token, token.complaint)
        return token

    def at(self, *operators: str) -> bool:
        """Whether the next token is one of these operators."""
        return self.peek().is_operator(*operators)

    def take(self) -> Token:
        """Return the next token and step over it."""
        token = self.peek()
        if token.kind != "end":
            self._next += 1
        return token

    def expect(self, operator: str, after: str) -> None:
        """Step over this operator or refuse what is there instead."""
        if not self.at(operator):
            token = self.peek()
            self.fail(token, f"{token.described} {after}", f"`{operator}`", f"write `{operator}` here")
        self._next += 1

    def fail(self, token: Token, found: str, allowed: str, advice: str) -> NoReturn:
        """Raise the error for one token."""
        self.refuse(token, Complaint(found, allowed, advice))

    def refuse(self, token: Token, complaint: Complaint) -> NoReturn:
        """Raise a worded complaint for one token."""
        refuse(self.text, self._where, token.start, token.end, complaint)


def _next(text: str, start: int, before: list[Token]) -> Token:
    sign = text[start]
    if sign.isidentifier():
        return _name(text, start)
    if sign == "`":
        return _quoted_name(text, start)
    number = _INTEGER.match(text, start)
    if number:
        if text[number.end() : number.end() + 1] == ".":
            return _refused(text, start, number.end() + 1, _DECIMAL)
        return Token("integer", number.group(), start, number.end())
    if text.startswith("==", start):
        return _refused(text, start, start + 2, _COMPARISON)
    for operator in _OPERATORS:
        if text.startswith(operator, start):
            return Token("operator", operator, start, start + len(operator))
    return _refused(text, start, start + 1, _complaint(text, start, before))


def _name(text: str, start: int) -> Token:
    end = start + 1
    while end < len(text) and ("a" + text[end]).isidentifier():
        end += 1
    if text.startswith("__", start):
        return _refused(text, start, end, _HIDDEN)
    return Token("name", text[start:end], start, end)


def _quoted_name(text: str, start: int) -> Token:
    end = text.find("`", start + 1)
    if end < 0:
        return _refused(text, start, len(text), _OPEN_QUOTE)
    name = text[start + 1 : end]
    if name.startswith("__"):
        return _refused(text, start, end + 1, _HIDDEN)
    if not name.strip() or not name.isprintable():
        return _refused(text, start, end + 1, _ODD_NAME)
    return Token("name", name, start, end + 1)


def _complaint(text: str, position: int, before: list[Token]) -> Complaint:
    sign = text[position]
    if sign == ".":
        return _ATTRIBUTE if before and before[-1].kind == "name" else _ALL_OTHERS
    if sign == "[" and not any(token.is_operator("~") for token in before):
        return _EVENT
    if sign in _REFUSED:
        return _REFUSED[sign]
    name = unicodedata.name(sign, "no name").lower()
    return Complaint(
        f"the sign U+{ord(sign):04X} ({name}) is not part of a formula",
        "column names, + - : * / ( ) ** and ~",
        "type it anew; text pasted from a word processor may hold look-alikes",
    )


def _refused(text: str, start: int, end: int, complaint: Complaint) -> Token:
    return Token("refused", text[start:end], start, end, complaint)


def _one_line(text: str) -> str:
    return "".join(sign if sign.isprintable() else " " for sign in text)


def _width(text: str) -> int:
    """Columns that a text takes on a terminal."""
    wide = sum(unicodedata.east_asian_width(sign) in "WF" for sign in text)
    return len(text) + wide - sum(unicodedata.combining(sign) > 0 for sign in text)
