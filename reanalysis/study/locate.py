"""The line of a TOML text on which each key stands.

The standard library's parser gives values without positions. This module walks
the same text once more and notes the line of every table header, key and array
element. It reads only text that the standard parser has accepted, so it need
not judge syntax, only follow it.
"""

from __future__ import annotations

import bisect
import re
import tomllib
from collections.abc import Mapping
from types import MappingProxyType

KeyPath = tuple[str | int, ...]

_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_BLANKS = re.compile(r"[ \t]*")
_FILLER = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_BARE_VALUE = re.compile(r"[^,\]}#\r\n]*")
_STRINGS = (
    re.compile(r'"""(?:\\.|[^\\])*?"{3,5}(?!")', re.DOTALL),
    re.compile(r"'''.*?'{3,5}(?!')", re.DOTALL),
    re.compile(r'"(?:\\.|[^"\\\n])*"'),
    re.compile(r"'[^'\n]*'"),
)


def locate_keys(text: str) -> Mapping[KeyPath, int]:
    """Map every key of a valid TOML text to its line.

    Parameters
    ----------
    text : str
        Text that `tomllib.loads` accepts.

    Returns
    -------
    mapping of key path to line number
        ``("prior", 0, "terms", "liner[film]")`` -> 31; lines count from 1, elements of arrays
        from 0. A table has the line of its header.
    """
    walker = _Walker(text)
    walker.walk()
    return MappingProxyType(walker.lines)


def line_of(lines: Mapping[KeyPath, int], path: KeyPath) -> int | None:
    """Line of a key or, where it is not in the file, of the closest section around it."""
    for length in range(len(path), 0, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return None


def dotted(key: KeyPath) -> str:
    """Write a key path as a message shows it: ``model.family``, ``question no. 2, effect``."""
    if len(key) > 1 and isinstance(key[1], int):
        rest = dotted(key[2:])
        return f"{key[0]} no. {key[1] + 1}" + (f", {rest}" if rest else "")
    text = ""
    for step in key:
        if isinstance(step, int):
            text += f"[{step + 1}]"
        else:
            name = step if _BARE_KEY.fullmatch(step) else f'"{step}"'
            text += f".{name}" if text else name
    return text


class _Walker:
    def __init__(self, text: str) -> None:
        self.text = text
        self.position = 0
        self.lines: dict[KeyPath, int] = {}
        self._newlines = [match.start() for match in re.finditer("\n", text)]
        self._elements: dict[KeyPath, int] = {}  # arrays of tables -> index of the latest element

    def walk(self) -> None:
        table: KeyPath = ()
        self._skip(_FILLER)
        while self.position < len(self.text):
            if self.text.startswith("[", self.position):
                table = self._header()
            else:
                self._assignment(table)
            self._skip(_FILLER)

    def _header(self) -> KeyPath:
        start = self.position
        many = self.text.startswith("[[", start)
        self.position += 2 if many else 1
        names = self._key()
        self.position += 2 if many else 1
        path: KeyPath = ()
        for name in names[:-1]:
            path = self._latest((*path, name))
            self._note(path, start)
        path = (*path, names[-1])
        if many:
            self._elements[path] = self._elements.get(path, -1) + 1
            self._note(path, start)
        path = self._latest(path)
        # An implicit parent took the line of its first child; its own header is the better place.
        self.lines[path] = self._line(start)
        return path

    def _latest(self, path: KeyPath) -> KeyPath:
        return (*path, self._elements[path]) if path in self._elements else path

    def _assignment(self, table: KeyPath) -> None:
        start = self.position
        path = table
        for name in self._key():
            path = (*path, name)
            self._note(path, start)
        self.position += 1  # the equals sign
        self._value(path)

    def _key(self) -> list[str]:
        names = []
        while True:
            self._skip(_BLANKS)
            bare = _BARE_KEY.match(self.text, self.position)
            if bare:
                names.append(bare.group())
                self.position = bare.end()
            else:
                names.append(self._quoted())
            self._skip(_BLANKS)
            if not self.text.startswith(".", self.position):
                return names
            self.position += 1

    def _quoted(self) -> str:
        start = self.position
        self._string()
        value: str = tomllib.loads(f"key = {self.text[start : self.position]}")["key"]
        return value

    def _string(self) -> bool:
        for pattern in _STRINGS:
            match = pattern.match(self.text, self.position)
            if match:
                self.position = match.end()
                return True
        return False

    def _value(self, path: KeyPath) -> None:
        self._skip(_BLANKS)
        opening = self.text[self.position : self.position + 1]
        if opening == "[":
            self._array(path)
        elif opening == "{":
            self._inline_table(path)
        elif not self._string():
            self._skip(_BARE_VALUE)

    def _array(self, path: KeyPath) -> None:
        self.position += 1
        index = 0
        self._skip(_FILLER)
        while not self.text.startswith("]", self.position):
            self._note((*path, index), self.position)
            self._value((*path, index))
            index += 1
            self._skip(_FILLER)
            self._skip_comma()
        self.position += 1

    def _inline_table(self, path: KeyPath) -> None:
        self.position += 1
        self._skip(_FILLER)
        while not self.text.startswith("}", self.position):
            self._assignment(path)
            self._skip(_FILLER)
            self._skip_comma()
        self.position += 1

    def _skip_comma(self) -> None:
        if self.text.startswith(",", self.position):
            self.position += 1
        self._skip(_FILLER)

    def _skip(self, pattern: re.Pattern[str]) -> None:
        match = pattern.match(self.text, self.position)
        if match:
            self.position = match.end()

    def _note(self, path: KeyPath, position: int) -> None:
        self.lines.setdefault(path, self._line(position))

    def _line(self, position: int) -> int:
        return bisect.bisect_left(self._newlines, position) + 1
