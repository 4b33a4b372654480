"""The folder of templates: where it is, and what may be read from it."""

from __future__ import annotations

import traceback
from pathlib import Path
from typing import TYPE_CHECKING, Any

from contingency.errors import TemplateFault

if TYPE_CHECKING:
    from contingency.report.pages import Report

ENTRY = "report.html"
"""The template that includes all others."""
STYLE = "report.css"
"""The style sheet that is always applied."""

TYPES = {
    ".css": "text/css",
    ".gif": "image/gif",
    ".jpeg": "image/jpeg",
    ".jpg": "image/jpeg",
    ".otf": "font/otf",
    ".png": "image/png",
    ".svg": "image/svg+xml",
    ".ttf": "font/ttf",
}
"""Kinds of files that a page may fetch, by the end of their names."""

FONTS = (".ttf", ".otf")


def templates_folder() -> Path:
    """Return the folder of templates that comes with the tool.

    A wheel carries it inside the package, a checkout has it beside the package.
    """
    package = Path(__file__).parents[1]
    inside = package / "report_templates"
    return inside if inside.is_dir() else package.parent / "report_templates"


def existing_folder(folder: Path) -> Path:
    """Return the folder of templates if it is one.

    Raises
    ------
    TemplateFault
        template-fault.  It is not there, or it is a file.
    """
    if folder.is_dir():
        return folder
    what = (
        "It is a file, not a folder" if folder.exists() else "There is no such folder"
    )
    raise TemplateFault(
        where=f"templates folder, {str(folder)!r}",
        found=f"{what}.",
        rule="Own templates are a folder, a copy of the tool's report_templates.",
        remedy="Correct the path, or leave the option out for the tool's own pages.",
    )


def file_of(folder: Path, name: str) -> Path:
    """Return the path of a file of the folder.

    Raises
    ------
    TemplateFault
        template-fault.  There is no such file, or it lies outside the folder.
    """
    path = folder / name
    inside = path.resolve().is_relative_to(folder.resolve())
    if not name or not inside or not path.is_file():
        raise TemplateFault(
            where=f"templates folder, {name!r}",
            found="There is no such file in the folder."
            if inside
            else "The file lies outside the folder.",
            rule="Templates read files of their own folder only.",
            remedy="Put the file into the folder, or correct the name.",
        )
    return path


def render_html(report: Report, folder: Path) -> str:
    """Return the whole report as one HTML text.

    Templates see the report's words and nothing else: no function of the program, no
    private attribute, no file outside the folder.

    Raises
    ------
    TemplateFault
        template-fault.  With file and line.
    """
    import jinja2

    environment = sandbox(folder)
    try:
        return str(environment.get_template(ENTRY).render(report=report))
    except TemplateFault:
        raise
    except jinja2.TemplateSyntaxError as fault:
        raise _fault(f"{fault.name}:{fault.lineno}", str(fault.message)) from fault
    except Exception as fault:
        raise _fault(_place(fault, folder), str(fault)) from fault


def sandbox(folder: Path) -> Any:  # noqa: ANN401  (jinja2 is imported inside)
    """Return the environment in which templates run."""
    import jinja2
    from jinja2.sandbox import ImmutableSandboxedEnvironment

    def load(name: str) -> tuple[str, str, None]:
        path = file_of(folder, name)
        try:
            return path.read_text(encoding="utf-8"), str(path), None
        except (OSError, UnicodeDecodeError) as fault:
            raise _fault(name, f"the file cannot be read: {fault}") from fault

    return ImmutableSandboxedEnvironment(
        loader=jinja2.FunctionLoader(load),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def _place(fault: Exception, folder: Path) -> str:
    """Return file and line of the template in which a fault arose."""
    frames = traceback.extract_tb(fault.__traceback__)
    for frame in reversed(frames):
        path = Path(frame.filename)
        if path.is_relative_to(folder):
            return f"{path.relative_to(folder)}:{frame.lineno}"
    return ENTRY


def _fault(where: str, found: str) -> TemplateFault:
    found = found.strip() or "something went wrong"
    return TemplateFault(
        where=where,
        found=found[0].upper() + found[1:].rstrip(".") + ".",
        rule="A template shows the fields of the report and its own files.",
        remedy="Compare the line with the same file of the tool's report_templates.",
    )
