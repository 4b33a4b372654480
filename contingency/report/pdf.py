"""The report as a PDF: everything that is needed to check it travels inside."""

from __future__ import annotations

import datetime as dt
import html
import json
import unicodedata
from collections.abc import Iterable
from hashlib import sha256
from pathlib import Path

from contingency.errors import AttachmentNameTaken, CharacterWithoutFont
from contingency.report.draft_mark import draft_marks
from contingency.report.folder import (
    existing_folder,
    render_html,
    templates_folder,
)
from contingency.report.look import characters_of, read_look
from contingency.report.page_front import TypedSignOff
from contingency.report.pages import make_pages
from contingency.report.typesetting import AttachedFile, Shelf, set_pages
from contingency.report.wording import count, listed
from contingency.study import Study

RESULTS = "results.json"
MANIFEST = "manifest.json"
MOST_NAMED = 10
"""Characters without a font that one message names."""


def write_report(
    study: Study,
    *,
    templates: Path | None = None,
    created: dt.datetime,
    draft: bool = True,
    results: bytes,
    extra_attachments: Iterable[AttachedFile] = (),
    typed: Iterable[TypedSignOff] = (),
) -> bytes:
    """Return the basis-of-contingency report of a study as a PDF.

    The file is PDF/A-3a and PDF/UA-1.  The estimate's files, the results and a
    manifest are attached, and the sign-off block holds empty fields for seals.  The
    same arguments make the same bytes.

    Parameters
    ----------
    study : Study
        Price-date money.
    templates : Path, optional
        An organisation's own copy of `report_templates`; without it, the tool's own.
    created : datetime
        Day and time of the report, with its time zone.
    draft : bool
        Marks every page as a draft.
    results : bytes
        `results.json`, as it is written beside the report.
    extra_attachments : iterable of AttachedFile
        More files that shall travel inside, such as sign-offs.
    typed : iterable of TypedSignOff
        Sign-offs given by name, printed in the sign-off block.

    Raises
    ------
    AttachmentNameTaken
        attachment-name-taken.  A file of the estimate has a name that the report needs.
    CharacterWithoutFont
        character-without-font.
    NoTextEngine
        no-text-engine.
    TemplateFault
        template-fault.  With file and line where they are known.

    Notes
    -----
    The folder of templates is trusted to make the page, not to run code: templates
    see the words of the report only, and pages fetch files of that folder only.
    """
    folder = existing_folder(templates or templates_folder()).absolute()
    look = read_look(folder)
    attached = _attached(study, results, extra_attachments)
    pages = make_pages(
        study,
        look,
        created=created,
        draft=draft,
        files={one.name: (one.description, one.content) for one in attached},
        typed=tuple(typed),
    )
    text = render_html(pages.report, folder)
    shelf = Shelf(
        folder=folder,
        pictures={**pages.pictures, **draft_marks(look)},
    )

    def check_fonts(fonts: frozenset[Path]) -> None:
        drawn = "".join(svg.decode() for svg in pages.pictures.values())
        _refuse_characters_without_font(
            html.unescape(text + drawn), fonts, look.letters.fallback
        )

    return set_pages(text, shelf, attached, created=created, check_fonts=check_fonts)


def _attached(
    study: Study, results: bytes, extra: Iterable[AttachedFile]
) -> tuple[AttachedFile, ...]:
    """Return all files that travel inside, the manifest of all others among them."""
    files = [
        AttachedFile(
            name=source.name,
            content=source.content,
            description="Input file of the estimate",
            relationship="Source",
        )
        for source in study.estimate.sources
    ]
    files.append(
        AttachedFile(
            name=RESULTS,
            content=results,
            description="Results, unrounded",
            relationship="Data",
        )
    )
    files += extra
    names = [one.name for one in files] + [MANIFEST]
    for name in names:
        if names.count(name) > 1:
            raise AttachmentNameTaken(
                where=name,
                found="Two files of the report would have this name.",
                rule="Each file inside the report has a name of its own.",
                remedy="Give the file in the estimate folder another name.",
            )
    manifest = AttachedFile(
        name=MANIFEST,
        content=_manifest(files, study.estimate.fingerprint),
        description="Length and SHA-256 of every other file",
        relationship="Data",
    )
    return (*files, manifest)


def _manifest(files: list[AttachedFile], fingerprint: str) -> bytes:
    """Return the manifest: name, length and digest of each file."""
    results = next(one.content for one in files if one.name == RESULTS)
    manifest = {
        "format": "contingency-manifest/1",
        "tool": json.loads(results)["tool"],
        "fingerprint": fingerprint,
        "files": [
            {
                "name": one.name,
                "bytes": len(one.content),
                "sha256": sha256(one.content).hexdigest(),
            }
            for one in sorted(files, key=lambda one: one.name)
        ],
    }
    return (json.dumps(manifest, indent=1, ensure_ascii=False) + "\n").encode()


def _refuse_characters_without_font(
    text: str, fonts: frozenset[Path], fallback: Path
) -> None:
    """Raise if characters of the report are in none of the fonts they may be set in.

    All of them are named at once, up to ten; the rest are counted.
    A character is safe in the font that all others fall back on, or in all of the
    others: the style sheet decides where it is set.
    """
    faces = [characters_of(path) for path in fonts if path != fallback]
    safe = frozenset.intersection(*faces) if faces else frozenset()
    if fallback in fonts:
        safe |= characters_of(fallback)
    missing = [
        character
        for character in sorted(set(text) - safe)
        if unicodedata.category(character) not in ("Cc", "Cf", "Zl", "Zp")
    ]
    if not missing:
        return
    named = [_named(character) for character in missing[:MOST_NAMED]]
    if len(missing) > MOST_NAMED:
        named.append(f"{count(len(missing) - MOST_NAMED)} more")
    verb = "is" if len(missing) == 1 else "are"
    raise CharacterWithoutFont(
        where=_around(missing[0], text),
        found=f"{listed(named)} {verb} in no font of the report.",
        rule="Every character must be in a font that travels inside the report.",
        remedy="Write it otherwise, or add a font to an own templates folder."
        if len(missing) == 1
        else "Write them otherwise, or add a font to an own templates folder.",
    )


def _named(character: str) -> str:
    """Return a character with its number and its name."""
    name = unicodedata.name(character, "no name")
    return f"{character!r} (U+{ord(character):04X}, {name})"


def _around(character: str, text: str) -> str:
    """Return a few words around the first place of a character."""
    at = text.index(character)
    before = text[:at].rpartition(">")[2][-30:]
    words = " ".join((before + text[at:].partition("<")[0][:30]).split())
    return f"report, near {words!r}"
