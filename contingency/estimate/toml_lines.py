"""On which line of a TOML text each key stands.

The standard library's parser gives values without places.  This one finds places
and no values, and only in text that the parser has accepted: it needs to know
where strings end and how deep brackets are, and nothing else.
"""

from __future__ import annotations

import re
import tomllib

KeyPath = tuple[str | int, ...]
"""Keys and positions from the root: ("contingency", "levels", 1, "level")."""

_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_SPACE = re.compile(r"[ \t]*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_STRING = re.compile(
    r'"""(?:[^\\]|\\.)*?"{3,5}(?!")'
    r"|'''.*?'{3,5}(?!')"
    r'|"(?:[^"\\\n]|\\.)*"'
    r"|'[^'\n]*'",
    re.DOTALL,
)
_SCALAR = re.compile(r"[^,\]}#\n]*")


class KeyLines:
    """Lines of the keys of one TOML text."""

    def __init__(self, text: str) -> None:
        """Find all keys of `text`, which `tomllib` must have accepted."""
        self._text = text
        self._at = 0
        self._counted_to = 0
        self._line = 1
        self._lines: dict[KeyPath, int] = {}
        self._elements: dict[KeyPath, int] = {}
        self._read()

    def line(self, path: KeyPath) -> int:
        """Return the line of a key, or of the nearest heading above it."""
        while path and path not in self._lines:
            path = path[:-1]
        return self._lines.get(path, 1)

    def _read(self) -> None:
        """Walk through the whole text, heading by heading and key by key."""
        heading: KeyPath = ()
        while self._skip(_BLANK):
            if self._text.startswith("[[", self._at):
                self._at += 2
                heading = self._heading(is_list=True)
                self._at += 2
            elif self._text[self._at] == "[":
                self._at += 1
                heading = self._heading(is_list=False)
                self._at += 1
            else:
                self._pair(heading)

    def _heading(self, *, is_list: bool) -> KeyPath:
        """Pass the keys of a heading; return the path of its table."""
        line = self._line_here()
        path: KeyPath = ()
        keys = self._keys()
        for depth, key in enumerate(keys):
            path = (*path, key)
            self._lines.setdefault(path, line)
            is_new = is_list and depth == len(keys) - 1
            if is_new:
                self._elements[path] = self._elements.get(path, -1) + 1
            if path in self._elements:
                path = (*path, self._elements[path])
                self._lines.setdefault(path, line)
        return path

    def _pair(self, table: KeyPath) -> None:
        """Pass `key = value`."""
        line = self._line_here()
        path = table
        for key in self._keys():
            path = (*path, key)
            self._lines.setdefault(path, line)
        self._at += 1  # the equals sign
        self._value(path)

    def _keys(self) -> list[str]:
        """Pass a dotted key; return its parts."""
        keys = []
        while True:
            self._skip(_SPACE)
            match = _STRING.match(self._text, self._at)
            if match:
                keys.append(next(iter(tomllib.loads(f"{match[0]} = 0"))))
            else:
                match = _BARE_KEY.match(self._text, self._at)
                keys.append(match[0] if match else "")
            self._at = match.end() if match else self._at
            self._skip(_SPACE)
            if not self._text.startswith(".", self._at):
                return keys
            self._at += 1

    def _value(self, path: KeyPath) -> None:
        """Pass one value, noting the keys and elements within it."""
        self._skip(_SPACE)
        start = self._text[self._at : self._at + 1]
        if start == "[":
            self._list(path)
        elif start == "{":
            self._inline_table(path)
        else:
            match = _STRING.match(self._text, self._at)
            match = match or _SCALAR.match(self._text, self._at)
            self._at = match.end() if match else len(self._text)

    def _list(self, path: KeyPath) -> None:
        """Pass a list in square brackets."""
        self._at += 1
        position = 0
        while self._skip(_BLANK) and self._text[self._at] != "]":
            element = (*path, position)
            self._lines[element] = self._line_here()
            self._value(element)
            self._pass_comma()
            position += 1
        self._at += 1

    def _inline_table(self, path: KeyPath) -> None:
        """Pass a table in curly brackets."""
        self._at += 1
        while self._skip(_BLANK) and self._text[self._at] != "}":
            self._pair(path)
            self._pass_comma()
        self._at += 1

    def _pass_comma(self) -> None:
        """Pass blanks and the comma between two entries."""
        if self._skip(_BLANK) and self._text[self._at] == ",":
            self._at += 1

    def _skip(self, pattern: re.Pattern[str]) -> bool:
        """Pass what the pattern matches; return whether any text is left."""
        match = pattern.match(self._text, self._at)
        self._at = match.end() if match else self._at
        return self._at < len(self._text)

    def _line_here(self) -> int:
        """Return the line at hand."""
        self._line += self._text.count("\n", self._counted_to, self._at)
        self._counted_to = self._at
        return self._line
