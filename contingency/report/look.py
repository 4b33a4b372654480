"""Colours and letters of the report, read from the templates folder."""

from __future__ import annotations

import re
import tomllib
from dataclasses import dataclass, fields
from functools import cache
from pathlib import Path

from contingency.errors import TemplateFault

ASCENT = 0.74
"""Height above the baseline that a line of text takes, in sizes."""
DESCENT = 0.21
"""Depth below the baseline, in sizes."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Colours:
    """The colours, each as #rrggbb."""

    ink: str
    muted: str
    rule: str
    hair: str
    accent: str
    pale: str
    tint: str
    draft: str


class Letters:
    """Advance widths of the letters that charts are set in.

    Charts place their labels by code, so that nothing overlaps; the widths are the
    ones that the PDF will have, for both take them from the same font file and
    neither kerns.
    """

    def __init__(
        self, family: str, regular: Path, semibold: Path, fallback: Path
    ) -> None:
        self.family = family
        self.fallback = fallback
        self._faces = {False: _face(regular), True: _face(semibold)}
        self._fallback = _face(fallback)

    def width(self, words: str, size: float, *, semibold: bool = False) -> float:
        """Return the width of a line of text set in `size` points, in points."""
        face = self._faces[semibold]
        return size * sum(
            face[c] if c in face else self._fallback.get(c, 0.6) for c in words
        )

    def fitted(
        self, words: str, size: float, room: float, *, semibold: bool = False
    ) -> str:
        """Return `words`, cut with an ellipsis so that they are at most `room` wide."""
        if self.width(words, size, semibold=semibold) <= room:
            return words
        while words and self.width(f"{words}…", size, semibold=semibold) > room:
            words = words[:-1].rstrip()
        return f"{words}…"


@dataclass(frozen=True, kw_only=True, slots=True)
class Look:
    """What charts need to know of the report's look."""

    colours: Colours
    letters: Letters


def read_look(folder: Path) -> Look:
    """Return the look that the templates folder asks for.

    Raises
    ------
    TemplateFault
        template-fault.  The file `look.toml` is missing or says something unusable.
    """
    path = folder / "look.toml"
    try:
        raw = tomllib.loads(path.read_text(encoding="utf-8"))
        colours = Colours(**{f.name: raw["colours"][f.name] for f in fields(Colours)})
        letters = raw["letters"]
        family = str(letters["family"])
        faces = {
            name: folder / letters[name] for name in ("regular", "semibold", "fallback")
        }
    except (OSError, KeyError, TypeError, ValueError) as fault:
        raise TemplateFault(
            where="look.toml",
            found=f"The file cannot be used: {fault}.",
            rule="It holds [colours] and [letters], as in the folder of the tool.",
            remedy="Copy look.toml from the tool's report_templates and change that.",
        ) from fault
    for field in fields(Colours):
        value = getattr(colours, field.name)
        if not isinstance(value, str) or not re.fullmatch("#[0-9a-fA-F]{6}", value):
            raise TemplateFault(
                where=f"look.toml, colours.{field.name}",
                found=f"The colour is {value!r}.",
                rule="A colour is a hash and six hexadecimal digits.",
                remedy='Write it like "#17596b".',
            )
    for name, face in faces.items():
        inside = face.resolve().is_relative_to(folder.resolve())
        if not inside or not face.is_file():
            raise TemplateFault(
                where=f"look.toml, letters.{name}",
                found=f"There is no font file {letters[name]!r} in the folder.",
                rule="The letters of charts are font files of the templates folder.",
                remedy="Put the font file there, or name one that is there.",
            )
    return Look(colours=colours, letters=Letters(family, **faces))


@cache
def _face(path: Path) -> dict[str, float]:
    """Return the advance width of each character of a font, in sizes."""
    from fontTools.ttLib import TTFont

    with TTFont(path, lazy=True) as font:
        advance = font["hmtx"].metrics
        size = font["head"].unitsPerEm
        return {
            chr(code): advance[glyph][0] / size
            for code, glyph in font.getBestCmap().items()
        }


def characters_of(path: Path) -> frozenset[str]:
    """Return the characters that a font file has a glyph for."""
    return frozenset(_face(path))
