"""The look of a seal: a small drawing in the report's own letters.

It stands in the field of the sign-off table and says in words that this is a digital
signature; what it proves is in the file, not in the picture.
"""

from __future__ import annotations

import datetime as dt
from html import escape
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from weasyprint.urls import URLFetcher

PAGE = """
<html lang="en-GB"><head><title>Seal</title><style>
@font-face {{ font-family: "Seal"; src: url("font:regular"); }}
@font-face {{ font-family: "Seal"; font-weight: 600; src: url("font:semibold"); }}
@font-face {{ font-family: "More letters"; src: url("font:more"); }}
@page {{ size: {width}pt {height}pt; margin: 3pt 5pt; }}
body {{ margin: 0; font: 6.6pt/1.25 "Seal", "More letters"; color: #1d2733; }}
b {{ font-size: 9pt; font-weight: 600; color: #1f4e79; }}
p {{ margin: 0; white-space: nowrap; }}
</style></head><body>{lines}</body></html>
"""


def draw_seal(
    *, name: str, role: str, when: dt.datetime, width: float, height: float
) -> bytes:
    """Return the look of a seal as a PDF of one page.

    Parameters
    ----------
    name : str
        Holder of the certificate.
    role : str
        What the seal stands for.
    when : datetime
        Claimed time of the seal, with its offset from UTC.
    width, height : float
        Of the field, in points.
    """
    from weasyprint import HTML

    moment = when.astimezone(dt.UTC)
    lines = (
        f"<p><b>{_text(name)}</b></p>"
        f"<p>Sealed as {_text(role)}, {moment:%Y-%m-%d %H:%M} UTC</p>"
        "<p>Digital signature: see the signature panel of the reader</p>"
    )
    page = PAGE.format(width=f"{width:.3f}", height=f"{height:.3f}", lines=lines)
    drawn = HTML(string=page, url_fetcher=_fonts_only()).write_pdf()
    return bytes(drawn or b"")


def _fonts() -> dict[str, Path]:
    import matplotlib as mpl
    from font_source_sans_pro import font_files_ttf

    regular = Path(font_files_ttf["SourceSansPro"])
    return {
        "regular": regular,
        "semibold": regular.with_name("SourceSansPro-Semibold.ttf"),
        "more": Path(mpl.get_data_path()) / "fonts" / "ttf" / "DejaVuSans.ttf",
    }


def _fonts_only() -> URLFetcher:
    """Make a fetcher that serves the three fonts and refuses everything else."""
    from weasyprint.urls import URLFetcher, URLFetcherResponse

    fonts = _fonts()

    class FontsOnly(URLFetcher):  # type: ignore[misc]  # it is shipped without types
        def fetch(
            self, url: str, headers: dict[str, str] | None = None
        ) -> URLFetcherResponse:
            del headers
            kind, _, name = url.partition(":")
            if kind != "font" or name not in fonts:
                raise ValueError(f"a seal has no use for {url}")
            return URLFetcherResponse(
                url, fonts[name].read_bytes(), {"Content-Type": "font/ttf"}
            )

    return FontsOnly(allowed_protocols=(), fail_on_errors=True)


def _text(words: str) -> str:
    """Return words as HTML, cut to the field; a letter that no font has becomes `?`."""
    from fontTools.ttLib import TTFont

    known: set[int] = set()
    for path in _fonts().values():
        with TTFont(path, lazy=True) as font:
            known |= set(font.getBestCmap())
    plain = " ".join(words.split())[:48]
    return escape("".join(c if ord(c) in known else "?" for c in plain))
