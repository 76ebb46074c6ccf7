"""What a checked formula consists of: response, intercept and a plain list of terms."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

SIMPLE_FUNCTIONS = ("log", "log1p", "exp", "sqrt", "abs", "scale", "standardise", "center")
"""Functions of one column that give one column."""

RESPONSE_FUNCTIONS = ("log", "log1p", "sqrt")
"""Functions that the response may be wrapped in."""

FUNCTIONS = (*SIMPLE_FUNCTIONS, "poly", "bs", "C")
"""Every function that a formula may call."""

_NOTHING: Mapping[str, str] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Column:
    """A column of the data, by its name there (without backticks)."""

    name: str

    @property
    def text(self) -> str:
        """As it stands in a formula."""
        return self.render(_NOTHING, _NOTHING)

    @property
    def columns(self) -> tuple[str, ...]:
        """The one column name."""
        return (self.name,)

    def render(self, rename: Mapping[str, str], functions: Mapping[str, str]) -> str:  # noqa: ARG002
        """Write it under another name; odd names get backticks."""
        name = rename.get(self.name, self.name)
        return name if name.isidentifier() else f"`{name}`"


@dataclass(frozen=True, slots=True)
class Call:
    """A function of one column.

    Attributes
    ----------
    function : str
        One of `FUNCTIONS`.
    argument : Column or Call
        What it is applied to; a Call is a simple function of a column.
    options : tuple of (str, int)
        ``degree`` of poly; ``df`` and, where given, ``degree`` of bs; else empty.
    """

    function: str
    argument: Column | Call
    options: tuple[tuple[str, int], ...] = ()

    @property
    def text(self) -> str:
        """As it stands in a formula: ``poly(days, 2)``, ``bs(days, df=4)``, ``log(days)``."""
        return self.render(_NOTHING, _NOTHING)

    @property
    def columns(self) -> tuple[str, ...]:
        """The one column name."""
        return self.argument.columns

    def render(self, rename: Mapping[str, str], functions: Mapping[str, str]) -> str:
        """Write it with columns and functions under other names."""
        inside = [self.argument.render(rename, functions)]
        for key, value in self.options:
            inside.append(str(value) if self.function == "poly" else f"{key}={value}")
        return f"{functions.get(self.function, self.function)}({', '.join(inside)})"


Factor = Column | Call


@dataclass(frozen=True, slots=True)
class Term:
    """One term: a single factor, or the interaction of several, all different.

    Attributes
    ----------
    factors : tuple of Column or Call
        In the order of writing.
    """

    factors: tuple[Factor, ...]

    @property
    def text(self) -> str:
        """Public name of the term: ``liner:days``."""
        return self.render(_NOTHING, _NOTHING)

    @property
    def columns(self) -> tuple[str, ...]:
        """Names of the columns used, each once, in the order of writing."""
        return tuple(dict.fromkeys(name for factor in self.factors for name in factor.columns))

    @property
    def key(self) -> frozenset[Factor]:
        """What makes two terms the same: ``a:b`` is ``b:a``."""
        return frozenset(self.factors)

    def render(self, rename: Mapping[str, str], functions: Mapping[str, str]) -> str:
        """Write it with columns and functions under other names."""
        return ":".join(factor.render(rename, functions) for factor in self.factors)


@dataclass(frozen=True, slots=True)
class FormulaParts:
    """A checked formula.

    Attributes
    ----------
    source : str
        As the author wrote it; not part of comparisons.
    response : Column or Call
        Left-hand side: a column, or log, log1p or sqrt of one.
    intercept : bool
        Whether the model has an intercept.
    terms : tuple of Term
        Right-hand side after expansion of ``*``, ``/``, ``**`` and ``-``; main effects first,
        then interactions by their order, otherwise in the order of writing. No term occurs twice.
    """

    source: str = field(compare=False)
    response: Factor
    intercept: bool
    terms: tuple[Term, ...]

    @property
    def response_name(self) -> str:
        """Name of the response's column."""
        return self.response.columns[0]

    @property
    def predictors(self) -> tuple[str, ...]:
        """Names of the columns on the right-hand side, each once, in the order of the terms."""
        return tuple(dict.fromkeys(name for term in self.terms for name in term.columns))

    @property
    def columns(self) -> tuple[str, ...]:
        """Names of all columns used, the response's first."""
        return (self.response_name, *self.predictors)

    def render(self, rename: Mapping[str, str] = _NOTHING, functions: Mapping[str, str] = _NOTHING) -> str:
        """Write the formula anew, every term and the intercept spelt out.

        Parameters
        ----------
        rename : mapping of str to str
            Column name -> name to write instead; other columns keep their names.
        functions : mapping of str to str
            Function name -> name to write instead, such as ``{"log": "np.log"}``.

        Returns
        -------
        str
            ``"y ~ 1 + a + b + a:b"``; ``0`` in place of ``1`` without an intercept. Without
            renaming, `check_formula` reads it back to equal parts, unless expansion made it
            longer than a formula may be.
        """
        left = self.response.render(rename, functions)
        right = ["1" if self.intercept else "0"]
        right += [term.render(rename, functions) for term in self.terms]
        return f"{left} ~ {' + '.join(right)}"
