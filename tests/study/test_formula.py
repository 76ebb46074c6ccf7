"""The formula's allow-list."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reanalysis.errors import FormulaError
from reanalysis.study.formula import Call, Column, FormulaParts, check_formula
from reanalysis.study.formula_tokens import MAX_LENGTH


def rendered(text: str) -> str:
    """Formula with all terms spelt out."""
    return check_formula(text).render()


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("y ~ a", "y ~ 1 + a"),
        ("y~1", "y ~ 1"),
        ("y ~ 0 + a", "y ~ 0 + a"),
        ("y ~ a - 1", "y ~ 0 + a"),
        ("y ~ -1 + a", "y ~ 0 + a"),
        ("y ~ a*b", "y ~ 1 + a + b + a:b"),
        ("y ~ a:b + c", "y ~ 1 + c + a:b"),
        ("y ~ a/b", "y ~ 1 + a + a:b"),
        ("y ~ (a + b)/c", "y ~ 1 + a + b + a:b:c"),
        ("y ~ a/(b + c)", "y ~ 1 + a + a:b + a:c"),
        ("y ~ a*b*c", "y ~ 1 + a + b + c + a:b + a:c + b:c + a:b:c"),
        ("y ~ (a + b + c)**2", "y ~ 1 + a + b + c + a:b + a:c + b:c"),
        ("y ~ (a + b + c)**3", "y ~ 1 + a + b + c + a:b + a:c + b:c + a:b:c"),
        ("y ~ a*b - b", "y ~ 1 + a + a:b"),
        ("y ~ a*b - (a + b)", "y ~ 1 + a:b"),
        ("y ~ (a + b):c", "y ~ 1 + a:c + b:c"),
        ("y ~ a + b + a*b", "y ~ 1 + a + b + a:b"),
        ("y ~ a*b + a*c", "y ~ 1 + a + b + c + a:b + a:c"),
        ("y ~ ((a))", "y ~ 1 + a"),
        ("y ~ (a*b):c + a:c", "y ~ 1 + a:c + b:c + a:b:c"),
        ("y ~ bs(x, df=5, degree=5)", "y ~ 1 + bs(x, df=5, degree=5)"),
        ("log(y) ~ log1p(a)", "log(y) ~ 1 + log1p(a)"),
        ("y ~ poly(a, degree=2)", "y ~ 1 + poly(a, 2)"),
        ("y ~ poly(log(a), 3)", "y ~ 1 + poly(log(a), 3)"),
        ("y ~ bs(a, 4)", "y ~ 1 + bs(a, df=4)"),
        ("y ~ bs(a, degree=2, df=5):C(g)", "y ~ 1 + bs(a, df=5, degree=2):C(g)"),
        ("y ~ `days in store`*g", "y ~ 1 + `days in store` + g + `days in store`:g"),
        ("Ertrag ~ Dünger + 漢字", "Ertrag ~ 1 + Dünger + 漢字"),
        ("y ~ `(` + `~`", "y ~ 1 + `(` + `~`"),
        ("y ~ a + log(a) + abs(a)", "y ~ 1 + a + log(a) + abs(a)"),
        ("df ~ bs(x, df=4)", "df ~ 1 + bs(x, df=4)"),
        ("log ~ C + log(C)", "log ~ 1 + C + log(C)"),
    ],
)
def test_operators_expand_to_terms(text: str, expected: str) -> None:
    """Operators mean what Wilkinson and Rogers say, main effects come first."""
    assert rendered(text) == expected


def test_parts_name_columns_and_terms() -> None:
    """The response, all columns and the public name of each term can be asked for."""
    parts = check_formula("sqrt(firmness) ~ liner*log(days) + C(store) - 1")

    assert parts.response == Call("sqrt", Column("firmness"))
    assert parts.response_name == "firmness"
    assert parts.columns == ("firmness", "liner", "days", "store")
    assert parts.predictors == ("liner", "days", "store")
    assert [term.text for term in parts.terms] == ["liner", "log(days)", "C(store)", "liner:log(days)"]
    assert parts.terms[3].columns == ("liner", "days")
    assert parts.intercept is False
    assert parts.source == "sqrt(firmness) ~ liner*log(days) + C(store) - 1"


def test_render_renames_columns_and_functions() -> None:
    """Columns and functions get other names, options stay; a column named like a function is a column."""
    parts = check_formula("log(y) ~ `a b`*poly(log(x), 2) + log + scale(x)")

    text = parts.render({"y": "v0", "a b": "v1", "x": "v2", "log": "v3"}, {"log": "np.log", "scale": "sc"})

    assert text == "np.log(v0) ~ 1 + v1 + poly(np.log(v2), 2) + v3 + sc(v2) + v1:poly(np.log(v2), 2)"


@pytest.mark.parametrize(
    ("text", "words"),
    [
        # Code.
        ('y ~ x + np.savetxt("f",x)', "reach into an object"),
        ('y ~ __import__("os").system("x")', "begin with two underscores"),
        ("y ~ x.__class__", "reach into an object"),
        ("y ~ `__class__`", "begin with two underscores"),
        ("y ~ eval(x)", "`eval` is not offered"),
        ("y ~ exec(x)", "`exec` is not offered"),
        ("y ~ lambda x: x", "`x` is unexpected here"),
        ('y ~ f"{x}"', "texts in quotes"),
        ("y ~ 'x'", "texts in quotes"),
        ("y ~ x[0]", "subscripts are not offered"),
        ("y ~ {x + 1}", "braces hold code"),
        ("y ~ I(x + 1)", "`I(...)` holds code"),
        ("y ~ log(x + 1)", "takes no arithmetic or code"),
        ("y ~ log(open(x))", "`open` is not offered"),
        ("y ~ log(x)(z)", "`(` is unexpected here"),
        ("y ~ (log)(x)", "`(` is unexpected here"),
        ("y ~ x @ z", "`@` is not offered"),
        ("y ~ x; z", "U+003B (semicolon)"),
        ("y ~ x = 1", "`=` is unexpected here"),
        # What other parsers misread without a word.
        ("y ~ x**2", "write poly(x, 2)"),
        ("y ~ (x)**2", "write poly(x, 2)"),
        ("y ~ log(x)**2", "write poly(log(x), 2)"),
        ("y ~ x^2", "write poly(x, 2)"),
        ("y ~ x%in%g", "write a:b for an interaction"),
        ("y ~ (1|g)", "group-level terms"),
        ("y ~ (x|g)", "group-level terms"),
        ("y ~ 1|g", "group-level terms"),
        ("y ~ x + offset(log(e))", "`exposure` key"),
        ("y ~ .", "name each column"),
        ("y[yes] ~ x", "the `event` key"),
        ("p(y, n) ~ x", "successes out of trials"),
        ("y ~ T(g)", "the reference level in `levels`"),
        ("y ~ x:x", "`x` would interact with itself"),
        ("y ~ x*x", "`x` would interact with itself"),
        # Shape.
        ("", "the formula is empty"),
        ("x + z", "found `+` after the response"),
        ("~ x", "does not begin with a response"),
        ("y + z ~ x", "found `+` after the response"),
        ("y ~ x ~ z", "`~` is unexpected here"),
        ("y ~", "ends where a term should be"),
        ("y ~ x +", "ends where a term should be"),
        ("y ~ + x", "found `+` where a term"),
        ("y ~ (x", "ends where the parenthesis"),
        ("y ~ x)", "close every parenthesis once"),
        ("y ~ x z", "`z` is unexpected here"),
        ("y ~ 2*x", "the number 2 is not a term"),
        ("y ~ 1*x", "0 and 1 stand for the intercept"),
        ("y ~ (0 + x)", "0 and 1 stand for the intercept"),
        ("y ~ x - 0", "the number 0 is not a term"),
        ("y ~ 1.5", "decimal numbers"),
        ("y ~ 0", "the right-hand side is empty"),
        ("y ~ 0 + 1", "has and has not an intercept"),
        ("y ~ x + x", "the term `x` occurs twice"),
        ("y ~ a:b + b:a", "the term `b:a` occurs twice"),
        ("y ~ a - b", "the term `b` cannot be taken out"),
        ("y ~ x + y", "the response `y` is also"),
        ("log(y) ~ exp(y)", "the response `y` is also"),
        ("exp(y) ~ x", "cannot be applied to the response"),
        ("log(log(y)) ~ x", "cannot be applied to the response"),
        ("y ~ log(log(log(x)))", "cannot stand in `log(...)`"),
        ("y ~ scale(poly(x, 2))", "cannot stand in `scale(...)`"),
        ("y ~ C(log(x))", "cannot stand in `C(...)`"),
        ("y ~ C(g, Treatment)", "takes one column only"),
        ("y ~ log(x, 2)", "takes one column only"),
        ("y ~ log()", "needs a column"),
        ("y ~ poly(x)", "`poly` needs `degree`"),
        ("y ~ poly(x, 0)", "1 to 10"),
        ("y ~ poly(x, 11)", "1 to 10"),
        ("y ~ poly(x, z)", "`z` is not an argument of `poly`"),
        ("y ~ poly(x, degree=2, degree=3)", "`degree` is given twice"),
        ("y ~ poly(x, raw=1)", "`raw` is not an argument"),
        ("y ~ bs(x)", "`bs` needs `df`"),
        ("y ~ bs(x, 4, 3)", "this argument has no name"),
        ("y ~ bs(x, df=2)", "df = 2 is too small"),
        ("y ~ bs(x, df=8, degree=6)", "1 to 5"),
        ("y ~ bs(x, df=4, degree=5)", "df = 4 is too small"),
        ("y ~ (a + b)**9", "small whole number"),
        ("y ~ (a + b)**c", "small whole number"),
        ("y ~ (a + b)**2**2", "twice in a row"),
        ("y ~ standardize(x)", "did you mean `standardise`"),
        ("y ~ `a b", "a backtick is never closed"),
        ("y ~ ` `", "this name in backticks"),
        ("y ~ x\\", "a backslash"),
        ("y ~ x +\nz", "in one line"),
        ("y ~ x –1", "U+2013 (en dash)"),
        ("y ~ x\u00a0+ z", "no-break space"),
        ("y ~ x > 1", "comparisons"),
        ("y ~ x == 1", "comparisons"),
        ("y ~ " + "x" * 2000, "2,004 signs"),
        ("y ~ " + "(" * 21 + "x" + ")" * 21, "nested too deeply"),
        ("y ~ (a + b + c + d + e + f + g + h + i)**5", "more than 200 terms"),
        ("y ~ (a+b)*(c+d)*(e+f)*(g+h)*(i+j)*(k+l)*(m+n)", "more than 200 terms"),
    ],
)
def test_everything_else_is_refused(text: str, words: str) -> None:
    """What the grammar does not offer is refused with its own message."""
    with pytest.raises(FormulaError, match=re.escape(words)):
        check_formula(text)


def test_twenty_parentheses_are_allowed() -> None:
    """The depth limit refuses the twenty-first."""
    assert rendered("y ~ " + "(" * 20 + "x" + ")" * 20) == "y ~ 1 + x"


def test_the_place_is_marked() -> None:
    """The message shows the formula and a caret under what is wrong, wide signs counted as two."""
    with pytest.raises(FormulaError, match=r"a\.toml, line 3") as caught:
        check_formula("漢字 ~ log(x) + offset(z)", where="a.toml, line 3")

    lines = caught.value.problems[0].found.splitlines()
    assert lines[1] == "        漢字 ~ log(x) + offset(z)"
    assert lines[2] == " " * (8 + len("漢字 ~ log(x) + ") + 2) + "^^^^^^"


def test_the_response_is_marked_where_it_comes_again() -> None:
    """The caret stands under the response on the right-hand side, not on the left."""
    with pytest.raises(FormulaError, match="is also on the right-hand side") as caught:
        check_formula("yy ~ x:yy + z")

    assert caught.value.problems[0].found.splitlines()[2] == " " * (8 + 7) + "^^"


def test_a_long_formula_is_shown_around_the_place() -> None:
    """Only the surroundings of the place are shown, and the caret still points at it."""
    text = "y ~ " + " + ".join(f"column{i}" for i in range(100)) + " + a@b + " + "z" * 300
    with pytest.raises(FormulaError, match="`@` is not offered") as caught:
        check_formula(text)

    _, formula, carets = caught.value.problems[0].found.splitlines()
    assert formula[carets.index("^")] == "@"
    assert formula.strip().startswith("...")
    assert formula.endswith("...")
    assert len(formula) < 150


NAMES = st.sampled_from(["a", "b", "c", "g", "x1", "_h", "größe", "`odd name`", "log", "`p(q)`"])
SIMPLE = st.sampled_from(["log", "exp", "sqrt", "abs", "scale", "center"])
FACTORS = (
    NAMES
    | st.builds("{}({})".format, SIMPLE, NAMES)
    | st.builds("poly({}, {})".format, NAMES, st.integers(1, 10))
    | st.builds("bs({}, df={})".format, NAMES, st.integers(3, 30))
    | st.builds("C({})".format, NAMES)
)
SUMS = st.recursive(
    FACTORS,
    lambda inner: (
        st.builds("({} {} {})".format, inner, st.sampled_from(["+", "*", "/", ":"]), inner)
        | st.builds("({} + {})**2".format, inner, inner)
    ),
    max_leaves=6,
)


def parsed(text: str) -> FormulaParts | None:
    """Parts of a formula, None where it is refused; any other exception fails the test."""
    try:
        return check_formula(text)
    except FormulaError:
        return None


@given(SUMS, st.sampled_from(["", "0 + ", "1 + "]))
def test_rendering_reads_back_as_the_same_parts(right: str, start: str) -> None:
    """A formula and its expanded text have equal parts, and expanding twice changes nothing."""
    parts = parsed(f"y ~ {start}{right}")
    if parts is None or len(parts.render()) > MAX_LENGTH:
        return

    again = check_formula(parts.render())

    assert again == parts
    assert again.render() == parts.render()
    assert len({term.key for term in parts.terms}) == len(parts.terms)


@given(st.text(max_size=40) | st.text(alphabet="yx~+-*/:()01 `,=.^|%[]{}@'\"\\_logpCbs2", max_size=40))
def test_any_text_gives_parts_or_a_formula_error(text: str) -> None:
    """No text makes the parser fail in another way, and what it accepts it can read again."""
    for candidate in (text, f"y ~ {text}", f"y ~ x + {text}", f"y ~ log({text})"):
        parts = parsed(candidate)
        if parts is not None and len(parts.render()) <= MAX_LENGTH:
            assert check_formula(parts.render()) == parts


@given(st.text(max_size=5), st.characters(exclude_characters=" \t+-*/:()~,=`01"), st.text(max_size=5))
def test_signs_outside_the_grammar_are_never_accepted(before: str, sign: str, after: str) -> None:
    """What is accepted holds, outside backticks, nothing but names, digits and the operators."""
    text = f"y ~ x{before}{sign}{after}"
    if parsed(text) is None:
        return

    bare = re.sub("`[^`]*`", "", text)
    strange = [c for c in bare if not ("a" + c).isidentifier() and c not in " \t+-*/:()~,="]
    assert strange == []
