"""Turn what pydantic says about a study file into plain sentences."""

from __future__ import annotations

import difflib
import types
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Any, Union, get_args, get_origin

from pydantic import BaseModel, ValidationError

from reanalysis.study.distributions import Distribution
from reanalysis.study.locate import KeyPath
from reanalysis.study.spec import StudySpec

Details = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing wrong with a study file, not yet tied to a line.

    Attributes
    ----------
    path : tuple
        The key, as in `reanalysis.study.locate`.
    found, allowed, advice : str
        As in `reanalysis.errors.Problem`.
    """

    path: KeyPath
    found: str
    allowed: str
    advice: str


def explain(error: ValidationError, raw: Mapping[str, Any]) -> list[Finding]:
    """List the findings behind a pydantic error.

    Parameters
    ----------
    error : ValidationError
        From `StudySpec.model_validate(raw)`.
    raw : mapping
        The study file as the TOML parser gave it.
    """
    return [_explain_one(item, raw) for item in error.errors(include_url=False)]


def shown(value: object) -> str:
    """Show a value of a study file in a message, shortened."""
    text = f'"{value}"' if isinstance(value, str) else str(value)
    if isinstance(value, bool):
        text = text.lower()
    # Line ends and control characters would break the message apart.
    text = "".join(sign if sign.isprintable() else repr(sign)[1:-1] for sign in text[:80])
    return text if len(text) <= 60 else f"{text[:57]}..."


def kind_of(value: object) -> str:
    """Name the TOML type of a value."""
    match value:
        case bool():
            return "true or false"
        case str():
            return "a text"
        case int() | float():
            return "a number"
        case list() | tuple():
            return "a list"
        case dict():
            return "a table"
        case _:
            return "a date or time"


def listed(names: Iterable[object]) -> str:
    """Join names with commas."""
    return ", ".join(str(name) for name in names)


def close_to(name: str, allowed: Iterable[str]) -> list[str]:
    """Names that `name` could be a misspelling of, the closest first."""
    return difflib.get_close_matches(name, list(allowed), n=3, cutoff=0.6)


def _explain_one(item: Any, raw: Mapping[str, Any]) -> Finding:
    path = _file_path(item["loc"], raw)
    kind: str = item["type"]
    if kind == "extra_forbidden":
        return _unknown_key(path, _node(raw, path[:-1]))
    if kind == "missing":
        return _missing_key(path)
    wording = _WORDING.get(kind)
    if wording:
        found, allowed, advice = wording(item["input"], item.get("ctx", {}))
        return Finding(path, found, allowed, advice)
    if kind.startswith(("int_", "float_", "finite_")):
        return _not_a_number(path, item["input"], kind)
    return Finding(path, f"{shown(item['input'])} is not accepted ({item['msg']})", "", "correct the value")


def _file_path(location: Iterable[str | int], raw: Mapping[str, Any]) -> KeyPath:
    """Pydantic's location without the tags it adds for the kind of distribution."""
    path: KeyPath = ()
    node: Any = raw
    for step in location:
        if isinstance(node, dict) and step not in node and node.get("dist") == step:
            continue
        path = (*path, step)
        try:
            node = node[step]
        except (KeyError, IndexError, TypeError):
            node = None
    return path


def section_of(path: KeyPath) -> tuple[str, tuple[str, ...]]:
    """Name a section and list its keys: ``("[data]", ("file", ...))``; no keys where any are allowed."""
    if not path:
        return "the top of the file", tuple(StudySpec.model_fields)
    head = str(path[0])
    model = _section_models().get(head)
    if model is None:
        return f"[{head}]", ()
    repeated = len(path) > 1 and isinstance(path[1], int)
    if len(path) <= (2 if repeated else 1):
        return (f"[[{head}]]" if repeated else f"[{head}]"), tuple(model.model_fields)
    return f"`{path[-1]}`", ()


def _section_models() -> dict[str, type[BaseModel]]:
    return {
        name: model
        for name, field in StudySpec.model_fields.items()
        if (model := _model_in(field.annotation)) is not None
    }


def _model_in(annotation: object) -> type[BaseModel] | None:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    for inner in get_args(annotation):
        if (model := _model_in(inner)) is not None:
            return model
    return None


def _distribution_keys() -> dict[str, tuple[str, ...]]:
    union = get_args(Distribution)[0]
    keys: dict[str, tuple[str, ...]] = {}
    for model in get_args(union) if get_origin(union) in (Union, types.UnionType) else ():
        keys[model.model_fields["dist"].default] = tuple(model.model_fields)
    return keys


def _node(raw: Any, path: KeyPath) -> Any:
    node = raw
    for step in path:
        node = node[step]
    return node


def _unknown_key(path: KeyPath, table: Mapping[str, Any]) -> Finding:
    key = str(path[-1])
    section, allowed = section_of(path[:-1])
    if not allowed:
        dist = str(table.get("dist"))
        section, allowed = f"a {dist} distribution", _distribution_keys().get(dist, ())
    close = close_to(key, allowed)
    homes = [name for name, model in _section_models().items() if key in model.model_fields]
    if close:
        advice = f"did you mean {' or '.join(f'`{name}`' for name in close)}?"
    elif homes:
        advice = f"move it to {' or '.join(f'[{name}]' for name in homes)}, where this key belongs"
    else:
        advice = "remove it, or correct its spelling"
    return Finding(path, f"unknown key `{key}` in {section}", listed(allowed), advice)


def _missing_key(path: KeyPath) -> Finding:
    key = str(path[-1])
    section, _ = section_of(path[:-1])
    if len(path) == 1 and key in _section_models():
        return Finding(path, f"the section [{key}] is missing", "", f"add a section [{key}]")
    return Finding(path, f"the key `{key}` is missing in {section}", "", f"add `{key} = ...` to {section}")


def _distribution_sentence() -> str:
    return "; ".join(
        f"{name}({', '.join(keys[1:])})" if len(keys) > 1 else name
        for name, keys in _distribution_keys().items()
    )


def _not_a_number(path: KeyPath, value: object, kind: str) -> Finding:
    wanted = "a whole number" if kind.startswith("int_") else "a finite number"
    return Finding(path, f"found {kind_of(value)}, {shown(value)}", wanted, f"write {wanted} without quotes")


Wording = Callable[[Any, Details], tuple[str, str, str]]


def _unknown_choice(value: object, details: Details) -> tuple[str, str, str]:
    allowed = str(details["expected"])
    names = [part.strip(" '") for part in allowed.replace(" or ", ",").split(",")]
    close = close_to(str(value), names)
    advice = f'did you mean "{close[0]}"?' if close else "choose one of the allowed values"
    return f"{shown(value)} is not one of the choices", listed(f'"{name}"' for name in names), advice


def _unknown_distribution(_: object, details: Details) -> tuple[str, str, str]:
    names = [part.strip(" '") for part in str(details["expected_tags"]).split(",")]
    tag = str(details["tag"])
    close = close_to(tag, names)
    if tag in _distribution_keys():
        advice = "choose a distribution of positive numbers: this parameter cannot be negative"
    elif close:
        advice = f'did you mean dist = "{close[0]}"?'
    else:
        advice = "choose one of the allowed distributions"
    return f"dist = {shown(tag)} is not a distribution for this place", listed(names), advice


def _no_distribution(_: object, __: Details) -> tuple[str, str, str]:
    return (
        "the distribution has no `dist`",
        _distribution_sentence(),
        'name it, as in { dist = "normal", mean = 0.0, sd = 1.0 }',
    )


def _text_wanted(value: object, _: Details) -> tuple[str, str, str]:
    return f"found {kind_of(value)}, {shown(value)}", "a text", "put the value between double quotes"


def _table_wanted(value: object, _: Details) -> tuple[str, str, str]:
    return (
        f"found {kind_of(value)}, {shown(value)}",
        "a table of keys and values",
        "write a section with its header on a line of its own, or { key = value, ... }",
    )


def _list_wanted(value: object, _: Details) -> tuple[str, str, str]:
    return (
        f"found {kind_of(value)}, {shown(value)}",
        "a list",
        'write a list such as ["one", "two"]; repeated sections have a double header, [[question]]',
    )


def _bounded(sign: str, key: str) -> Wording:
    def wording(value: object, details: Details) -> tuple[str, str, str]:
        bound = details[key]
        bound = f"{bound:g}" if isinstance(bound, float) else bound
        advice = "choose a value in the allowed range"
        if isinstance(value, int | float) and bound == "1" and 1 < value <= 100:
            advice = f"write a share of one, such as {value / 100:g} for {value:g} %"
        return f"{shown(value)} is out of range", f"numbers {sign} {bound}", advice

    return wording


_WORDING: dict[str, Wording] = {
    "literal_error": _unknown_choice,
    "union_tag_invalid": _unknown_distribution,
    "union_tag_not_found": _no_distribution,
    "string_type": _text_wanted,
    "string_too_short": lambda _value, _ctx: ("found an empty text", "", "write a text, or remove the key"),
    "string_too_long": lambda value, ctx: (
        f"found a text of {len(value)} characters",
        f"at most {ctx['max_length']} characters",
        "shorten the text",
    ),
    "string_pattern_mismatch": lambda value, _ctx: (
        f"{shown(value)} cannot be the name of a prior set",
        "a letter, then at most 39 letters, digits, blanks, hyphens and underscores (A-Z, a-z, 0-9)",
        "choose another name",
    ),
    "model_type": _table_wanted,
    "model_attributes_type": _table_wanted,
    "dict_type": _table_wanted,
    "tuple_type": _list_wanted,
    "greater_than": _bounded("above", "gt"),
    "greater_than_equal": _bounded("of at least", "ge"),
    "less_than": _bounded("below", "lt"),
    "less_than_equal": _bounded("of at most", "le"),
    "value_error": lambda _value, ctx: (str(ctx["error"]), "", "correct the values"),
}
