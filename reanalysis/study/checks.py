"""What keys of a study file must have in common, checked on the raw file.

These checks look at the file before pydantic's verdict is known, so that one
misspelt key does not hide the next problem. Values of a wrong type are passed
over: pydantic reports those.
"""

from __future__ import annotations

import io
from collections.abc import Iterator, Mapping
from typing import Any

from reanalysis.study.findings import Finding, close_to, listed, shown
from reanalysis.study.locate import KeyPath
from reanalysis.study.spec import BUILT_IN_PRIOR_SETS, LINKS

Raw = Mapping[str, Any]


def cross_check(raw: Raw) -> list[Finding]:
    """List what is wrong between the keys of a study file.

    Parameters
    ----------
    raw : mapping
        The study file as the TOML parser gave it.
    """
    data, model = _table(raw, "data"), _table(raw, "model")
    return [
        *_encoding(data),
        *_sheet(data),
        *_levels(data),
        *_link(model),
        *_family_keys(model),
        *_names(raw, "question", "question"),
        *_names(raw, "prior", "prior set"),
        *_reserved_names(raw),
        *_main_prior(raw, model),
    ]


def _table(raw: Raw, key: str) -> Raw:
    value = raw.get(key)
    return value if isinstance(value, dict) else {}


def _text(table: Raw, key: str) -> str | None:
    value = table.get(key)
    return value if isinstance(value, str) and value else None


def _tables(raw: Raw, key: str) -> list[tuple[int, Raw]]:
    value = raw.get(key)
    items = value if isinstance(value, list) else []
    return [(index, item) for index, item in enumerate(items) if isinstance(item, dict)]


def _encoding(data: Raw) -> Iterator[Finding]:
    name = _text(data, "encoding")
    if name is None:
        return
    try:
        # Looks the name up and refuses codecs that are not text; decoding no bytes does neither.
        io.TextIOWrapper(io.BytesIO(), encoding=name)
    except (LookupError, ValueError):
        yield Finding(
            ("data", "encoding"),
            f"{shown(name)} is not a text encoding that Python knows",
            'such as "utf-8", "cp1252", "latin-1", "utf-16"',
            "name the encoding that the data file was saved in",
        )


def _sheet(data: Raw) -> Iterator[Finding]:
    file = _text(data, "file")
    if _text(data, "sheet") and file and not file.lower().endswith(".xlsx"):
        yield Finding(
            ("data", "sheet"),
            f"`sheet` is set, but {shown(file)} has no sheets",
            "`sheet` for .xlsx files",
            "remove `sheet`",
        )


def _levels(data: Raw) -> Iterator[Finding]:
    declared = data.get("levels")
    missing = data.get("missing_values", [""])
    for name, levels in declared.items() if isinstance(declared, dict) else ():
        if not isinstance(levels, list) or not all(isinstance(level, str) for level in levels):
            continue
        path: KeyPath = ("data", "levels", name)
        if len(levels) < 2:
            yield Finding(
                path,
                f"{len(levels)} level declared for `{name}`",
                "two levels or more, the first is the reference",
                "declare all levels, or leave the column out of `levels`",
            )
        twice = sorted({level for level in levels if levels.count(level) > 1})
        if twice:
            yield Finding(
                path,
                f"level {listed(map(shown, twice))} declared more than once for `{name}`",
                "each level once",
                "remove the repetition",
            )
        blank = [level for level in levels if level != level.strip() or not level]
        if blank:
            yield Finding(
                path,
                f"level {listed(map(shown, blank))} of `{name}` is empty or has blanks around it",
                "levels without blanks around them (those in the data are removed too)",
                "remove the blanks",
            )
        lost = [level for level in levels if level and isinstance(missing, list) and level in missing]
        if lost:
            yield Finding(
                path,
                f"level {listed(map(shown, lost))} of `{name}` is also in `missing_values`",
                "",
                "take it out of one of the two",
            )


def _link(model: Raw) -> Iterator[Finding]:
    family, link = _text(model, "family"), _text(model, "link")
    offered = {str(name): links for name, links in LINKS.items()}
    known = {link for links in LINKS.values() for link in links}
    if family in offered and link in known and link not in offered[family]:
        yield Finding(
            ("model", "link"),
            f"the link {shown(link)} is not offered with the family {shown(family)}",
            listed(f'"{name}"' for name in offered[family]),
            "choose an allowed link, or remove `link` to get the first of them",
        )


def _family_keys(model: Raw) -> Iterator[Finding]:
    family = _text(model, "family")
    homes = {
        "event": ("bernoulli", "the modelled level of a two-level response"),
        "exposure": ("poisson", "the column that holds each row's exposure"),
    }
    for key, (home, meaning) in homes.items():
        if key in model and family in LINKS and family != home:
            yield Finding(
                ("model", key),
                f"`{key}` is set with the family {shown(family)}",
                f'`{key}` ({meaning}) with family = "{home}"',
                f"remove `{key}`, or correct the family",
            )


def _names(raw: Raw, key: str, what: str) -> Iterator[Finding]:
    first: dict[str, int] = {}
    for index, item in _tables(raw, key):
        name = _text(item, "name")
        if name is None:
            continue
        folded = name.strip().casefold()
        if folded in first:
            yield Finding(
                (key, index, "name"),
                f"{shown(name)} is already the name of {what} no. {first[folded] + 1}",
                "a different name for each (capital letters make no difference)",
                "rename one of them",
            )
        first.setdefault(folded, index)


def _reserved_names(raw: Raw) -> Iterator[Finding]:
    for index, item in _tables(raw, "prior"):
        name = _text(item, "name")
        if name and name.strip().casefold() in BUILT_IN_PRIOR_SETS:
            yield Finding(
                ("prior", index, "name"),
                f"{shown(name)} is the name of a built-in prior set",
                f"any name but {listed(BUILT_IN_PRIOR_SETS)}",
                "rename this prior set",
            )


def _main_prior(raw: Raw, model: Raw) -> Iterator[Finding]:
    main = _text(model, "main_prior")
    own = [name for _, item in _tables(raw, "prior") if (name := _text(item, "name"))]
    known = list(dict.fromkeys([*BUILT_IN_PRIOR_SETS, *own]))
    if main is None or main in known:
        return
    close = close_to(main, known)
    yield Finding(
        ("model", "main_prior"),
        f"there is no prior set {shown(main)}",
        listed(f'"{name}"' for name in known),
        f'did you mean "{close[0]}"?' if close else "name one of them, or add a [[prior]] with this name",
    )
