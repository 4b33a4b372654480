"""The mark that lies behind every page of a draft."""

from __future__ import annotations

from contingency.report.look import Look

WORD = "DRAFT"


def draft_marks(look: Look) -> dict[str, bytes]:
    """Return the mark for upright and for wide pages, by picture name."""
    return {
        "draft-upright": _mark(look, 210, 297, 62, -54),
        "draft-wide": _mark(look, 297, 210, 56, -35),
    }


def _mark(look: Look, width: int, height: int, size: int, angle: int) -> bytes:
    """Return the word across a page of `width` by `height` millimetres."""
    length = look.letters.width(WORD, size, semibold=True)
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}mm" '
        f'height="{height}mm" viewBox="0 0 {width} {height}">'
        f'<g transform="translate({width / 2:g} {height / 2:g}) rotate({angle})">'
        f'<text x="{-length / 2:.2f}" y="{size * 0.33:.2f}" '
        f'font-family="\'{look.letters.family}\'" font-weight="600" '
        f'font-size="{size}" fill="{look.colours.draft}">{WORD}</text></g></svg>\n'
    ).encode()
