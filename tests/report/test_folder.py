"""Templates: what they may read, and how their faults are named."""

import io
import re
import shutil
from pathlib import Path

import pypdf
import pytest

from contingency.errors import TemplateFault
from contingency.report.draft_mark import draft_marks
from contingency.report.folder import (
    ENTRY,
    STYLE,
    file_of,
    render_html,
    templates_folder,
)
from contingency.report.look import read_look
from contingency.report.pages import make_pages
from contingency.report.pdf import write_report
from contingency.study import run_study
from tests.report.conftest import CREATED
from tests.report.funded_refit import funded
from tests.report.second_revision import second_revision

ROOT = Path(__file__).parents[2]


@pytest.fixture
def folder(tmp_path):
    """An organisation's own copy of the templates."""
    return shutil.copytree(templates_folder(), tmp_path / "own")


@pytest.fixture(scope="module")
def report(refit, results, look):
    """The words of the refit's report."""
    files = {"results.json": ("Results", results)}
    return make_pages(refit, look, created=CREATED, draft=True, files=files).report


def put(folder, name, old, new):
    """Replace a piece of text in a template."""
    path = folder / name
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")


def line_of(folder, name, words):
    """The line of a file in which the words stand."""
    lines = (folder / name).read_text(encoding="utf-8").splitlines()
    return next(i for i, line in enumerate(lines, start=1) if words in line)


@pytest.mark.parametrize(
    ("new", "found"),
    [
        ("{{ page.contingensy }}", "contingensy"),
        ("{{ nonsense }}", "'nonsense' is undefined"),
        ("{{ page.contingency", "Unexpected"),
        ("{% if page %}", "Unexpected end of template"),
        ("{{ page.levels[99].name }}", "has no element 99"),
        ("{{ page.contingency | no_such_filter }}", "no_such_filter"),
        ("{{ 1 / 0 }}", "Division by zero"),
    ],
)
def test_a_fault_is_named_with_file_and_line(folder, report, new, found):
    """The way an editor understands it."""
    put(folder, "answer.html", "{{ page.contingency }}", new)
    with pytest.raises(TemplateFault) as fault:
        render_html(report, folder)

    file, line = fault.value.where.split(":")
    assert file == "answer.html"
    text = (folder / file).read_text(encoding="utf-8")
    # A block without an end is noticed at the last tag of the file.
    end = len(text.splitlines()) - 1 if new.startswith("{%") else 0
    assert int(line) == (end or line_of(folder, file, new))
    assert found in fault.value.found


@pytest.mark.parametrize(
    "attack",
    [
        "{{ report.__class__ }}",
        "{{ report.__class__.__mro__[1].__subclasses__() }}",
        "{{ ''.__class__.__base__ }}",
        "{{ report.answer.__init__.__globals__ }}",
        "{{ self.__init__ }}",
        "{{ ('%s' | format(report.__dict__)) }}",
        "{{ '{0.__class__}'.format(report) }}",
        "{{ cycler.__init__.__globals__.os.popen('id').read() }}",
        "{{ report.title | attr('__class__') }}",
        "{% for n in range(999999999) %}{% endfor %}",
    ],
)
def test_a_template_cannot_reach_behind_the_words(folder, report, attack):
    """No class, no module, no command, no endless loop."""
    put(folder, "answer.html", "{{ page.contingency }}", attack)
    with pytest.raises(TemplateFault) as fault:
        render_html(report, folder)

    assert fault.value.where.startswith("answer.html:")


@pytest.mark.parametrize(
    "name", ["../secret.html", "/etc/passwd", "link.html", "", "nowhere.html", "fonts"]
)
def test_only_files_of_the_folder_are_read(folder, report, name):
    """No way up, no absolute path, no link that leads out."""
    (folder.parent / "secret.html").write_text("secret", encoding="utf-8")
    (folder / "link.html").symlink_to(folder.parent / "secret.html")
    with pytest.raises(TemplateFault):
        file_of(folder, name)

    put(folder, ENTRY, '"answer.html"', f'"{name}"')
    with pytest.raises(TemplateFault):
        render_html(report, folder)


def test_a_template_of_another_encoding_is_named(folder, report):
    """UTF-8 it is, everywhere."""
    (folder / "answer.html").write_bytes("Gebühr".encode("latin-1"))
    with pytest.raises(TemplateFault, match=r"answer\.html"):
        render_html(report, folder)


@pytest.mark.parametrize(
    ("old", "new", "where"),
    [
        ('accent = "#17596b"', 'accent = "petrol"', "look.toml, colours.accent"),
        ('ink    = "#1b232c"', "ink = 3", "look.toml, colours.ink"),
        ('accent = "#17596b"', "", "look.toml"),
        ("[letters]", "[letters", "look.toml"),
        ("SourceSansPro-Semibold.ttf", "no.ttf", "look.toml, letters.semibold"),
        ("fonts/DejaVuSans.ttf", "../out.ttf", "look.toml, letters.fallback"),
    ],
)
def test_a_wrong_look_is_named(folder, old, new, where):
    """Which entry, what was found, what it should be."""
    put(folder, "look.toml", old, new)
    with pytest.raises(TemplateFault) as fault:
        read_look(folder)

    assert fault.value.where == where
    assert fault.value.rule
    assert fault.value.remedy


def tiny(folder, style, page):
    """Reduce a folder to one page and one style sheet."""
    (folder / ENTRY).write_text(
        '<html lang="en-GB"><head><title>A page</title></head><body>'
        f"{page}</body></html>",
        encoding="utf-8",
    )
    (folder / STYLE).write_text(style, encoding="utf-8")


FACE = '@font-face { font-family: "Own"; src: url(folder:fonts/DejaVuSans.ttf) }\n'


@pytest.mark.parametrize(
    ("style", "page", "where", "found"),
    [
        (FACE + "p { colour: red }", "<p>A</p>", "report.css:2", "colour"),
        (FACE + "\n\np { color: reddish }", "<p>A</p>", "report.css:4", "reddish"),
        ("p { color: red }", "<p>A</p>", "report.css", "@font-face"),
        (
            "@font-face { font-family: 'X'; src: url(folder:fonts/no.ttf) }",
            "<p>A</p>",
            "templates folder, 'fonts/no.ttf'",
            "no such file",
        ),
        (FACE, '<img src="chart:nothing" alt="A">', "chart:nothing", "cannot have"),
        (FACE, '<img src="folder:../x.png" alt="A">', "../x.png", "outside"),
        (FACE, '<img src="file:///etc/hostname" alt="A">', "file:///etc", "cannot"),
        (FACE, '<img src="http://127.0.0.1:9/x.png" alt="A">', "127.0.0.1", "cannot"),
        (FACE, '<img src="data:image/png;base64,x" alt="A">', "data:", "cannot"),
        (FACE, '<link rel="stylesheet" href="file:///x.css">', "file:///x", "cannot"),
        (FACE, '<img src="folder:look.toml" alt="A">', "look.toml", "cannot have"),
        (FACE, '<img src="picture.png" alt="A">', "templates folder", "base URI"),
        (FACE, '<a href="#nowhere">A</a>', "templates folder", "nowhere"),
        (FACE, '<img src="chart:cumulative">', "templates folder", "alt"),
    ],
)
def test_a_page_that_cannot_be_set_is_named(
    folder, refit, results, style, page, where, found
):
    """Every warning is a fault, and every address outside the folder is refused."""
    tiny(folder, style, page)
    with pytest.raises(TemplateFault) as fault:
        write_report(refit, templates=folder, created=CREATED, results=results)

    assert where in fault.value.where
    assert found in fault.value.found


def test_an_own_folder_makes_an_own_report(folder, refit, results):
    """Own words, own colours, own picture; the figures are the same."""
    (folder / "mark.svg").write_text(
        '<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"/>',
        encoding="utf-8",
    )
    tiny(
        folder,
        FACE + 'p { font-family: "Own"; color: #17596b }',
        '<p>Our house: {{ report.answer.contingency }}</p><img src="folder:mark.svg" '
        'alt="Our mark"><img src="chart:swing" alt="{{ report.drivers.swing.alt }}">',
    )
    pdf = write_report(refit, templates=folder, created=CREATED, results=results)
    text = pypdf.PdfReader(io.BytesIO(pdf)).pages[0].extract_text()
    printed = re.search(r"Our house: GBP\s([\d,]+)", text)

    assert printed
    assert round(float(printed[1].replace(",", "")), -3) == round(
        refit.target.contingency, -3
    )


def test_a_heading_and_a_first_row_do_not_stay_behind(folder, refit, results):
    """Wherever on a page a table begins, its first two rows and its heading agree."""
    rows = "".join(
        f"<tr><th scope='row'>Row{i}</th><td>x</td></tr>" for i in range(1, 7)
    )
    starts = range(10, 50)
    page = "".join(
        f'<section style="break-before: page">{"<p>Filler</p>" * n}<h2>Head</h2>'
        f"<p>Before</p><table><caption><b>A</b></caption><thead><tr>"
        f"<th scope='col'>Name</th><th scope='col'>Cell</th></tr></thead>"
        f"<tbody>{rows}</tbody></table></section>"
        for n in starts
    )
    path = folder / ENTRY
    text = path.read_text(encoding="utf-8")
    head, _, _ = text.partition("<body>")
    path.write_text(f"{head}<body><main>{page}</main></body></html>", encoding="utf-8")
    pdf = write_report(refit, templates=folder, created=CREATED, results=results)
    sheets = [sheet.extract_text() for sheet in pypdf.PdfReader(io.BytesIO(pdf)).pages]
    with_head = [sheet for sheet in sheets if "Head" in sheet]

    assert len(with_head) == len(starts)
    assert len(sheets) > len(starts), "no table reached the foot of a page"
    for sheet in with_head:
        assert {"Before", "Row1", "Row2"} <= set(sheet.split()), sheet


@pytest.mark.parametrize(
    ("name", "found"),
    [("nowhere", "There is no such folder."), ("look.toml", "It is a file")],
)
def test_a_folder_that_is_not_there_is_said_to_be_missing(
    folder, refit, results, name, found
):
    """And not that one of its files cannot be used."""
    with pytest.raises(TemplateFault) as fault:
        write_report(refit, templates=folder / name, created=CREATED, results=results)

    assert name in fault.value.where
    assert "templates folder" in fault.value.where
    assert fault.value.found.startswith(found)


def test_the_document_names_every_file_and_every_picture(look, results):
    """`docs/own-templates.md` is what an organisation works from."""
    document = (ROOT / "docs" / "own-templates.md").read_text(encoding="utf-8")
    named = set(re.findall(r"^\| `([\w./-]+)` \|", document, re.MULTILINE))
    there = {
        f"{path.name}/" if path.is_dir() else path.name
        for path in templates_folder().iterdir()
    }
    pictures = set(re.findall(r"`chart:([\w-]+)`", document))
    files = {"results.json": ("Results", results)}
    drawn = set(draft_marks(look))
    for study in (run_study(funded()), second_revision()):
        pages = make_pages(study, look, created=CREATED, draft=True, files=files)
        drawn |= set(pages.pictures)

    assert named == there
    assert pictures == drawn
