"""The PDF: its bytes, its words, its figures, and what travels inside."""

import dataclasses
import datetime as dt
import io
import json
import os
import pickle
import re
import subprocess
import sys
from hashlib import sha256
from pathlib import Path

import pikepdf
import pytest
from pypdf import PdfReader

from contingency.errors import AttachmentNameTaken, CharacterWithoutFont
from contingency.estimate.nouns import SourceFile
from contingency.report.folder import ENTRY, templates_folder
from contingency.report.pdf import write_report
from contingency.report.typesetting import AttachedFile
from contingency.report.wording import in_unit, table_unit
from contingency.results import as_json
from contingency.study import run_study
from tests.report.conftest import CREATED
from tests.report.second_revision import second_revision
from tests.report.ship_refit import ship_refit
from tests.report.test_pages import bare

STEP = 1000.0
UNIT = table_unit(STEP)


def plain(text):
    """Text with one plain space wherever there is white space."""
    return " ".join(text.split())


@pytest.fixture(scope="module")
def pages(draft):
    """The text of every page of the draft."""
    return [plain(page.extract_text()) for page in PdfReader(io.BytesIO(draft)).pages]


@pytest.fixture(scope="module")
def small():
    """A study that is set in little time."""
    return run_study(bare())


def written(study, **changes):
    """The report of a study, issued unless said otherwise."""
    wanted = {
        "created": CREATED,
        "draft": False,
        "results": as_json(study.results()),
        **changes,
    }
    return write_report(study, **wanted)


@pytest.fixture(scope="module")
def issued(small):
    """Its report without the draft mark."""
    return written(small)


# ---- bytes ----


def test_two_renders_give_the_same_bytes(refit, results, draft):
    """In one process, one after the other."""
    assert write_report(refit, created=CREATED, results=results) == draft


def test_another_process_gives_the_same_bytes(refit, results, draft, tmp_path):
    """With other hash seeds, other time zone, other locale, and no fonts of its own."""
    (tmp_path / "study").write_bytes(pickle.dumps((refit, CREATED, results)))
    code = (
        "import pickle, sys; from pathlib import Path;"
        "from contingency.report.pdf import write_report;"
        "study, created, results = pickle.loads(Path(sys.argv[1]).read_bytes());"
        "pdf = write_report(study, created=created, results=results);"
        "Path(sys.argv[2]).write_bytes(pdf)"
    )
    environment = {
        "PATH": os.environ["PATH"],
        "PYTHONPATH": str(Path.cwd()),
        "PYTHONHASHSEED": "777",
        "TZ": "Asia/Tokyo",
        "LC_ALL": "C",
        "HOME": str(tmp_path),
        "FONTCONFIG_FILE": str(tmp_path / "nothing.conf"),
        "SOURCE_DATE_EPOCH": "1",
    }
    subprocess.run(
        [sys.executable, "-c", code, tmp_path / "study", tmp_path / "report.pdf"],
        env=environment,
        cwd=tmp_path,
        check=True,
        capture_output=True,
    )

    assert (tmp_path / "report.pdf").read_bytes() == draft


def test_one_moment_is_the_same_in_every_time_zone(small, issued):
    """The report is dated in UTC."""
    east = CREATED.astimezone(dt.timezone(dt.timedelta(hours=9)))

    assert written(small, created=east) == issued


# ---- words ----


def test_a_draft_says_so_on_every_page(pages):
    """Behind the text, and in the foot."""
    for page in pages:
        assert "DRAFT" in page
        assert "Draft for review" in page


def test_an_issued_report_says_so_and_nothing_of_a_draft(issued):
    """Neither behind the text nor in the foot."""
    for page in PdfReader(io.BytesIO(issued)).pages:
        text = plain(page.extract_text())
        assert "DRAFT" not in text
        assert "Draft for review" not in text
        assert "Issued" in text


def test_every_page_tells_what_it_belongs_to(pages):
    """Project and chapter above; revision, fingerprint and number below."""
    for number, page in enumerate(pages, start=1):
        assert page.endswith(
            f"Revision C · Draft for review · Inputs 3f9a 6c2e 7b1d "
            f"Page {number} of {len(pages)}"
        )
        assert "Refit of the research vessel Halcyon" in page


def test_the_answer_is_on_one_page(pages):
    """The second, between the title page and the contents."""
    assert [i for i, page in enumerate(pages) if "asked for on a base" in page] == [1]
    assert "The answer" in pages[1]
    assert pages[2].startswith("DRAFT Contents")


@pytest.mark.slow
def test_the_answer_stays_on_one_page_with_words_without_end(refit):
    """Long names, long reasons, many levels, and rows longer than a page."""
    words = "A name that goes on & on, with ÄÖÜ ß ñ ç Ω and <b>tags</b> "
    estimate = refit.estimate
    rule = estimate.contingency
    long = estimate.model_copy(
        update={
            "project": words * 4,
            "owner": words * 4,
            "gate": words,
            "contingency": rule.model_copy(
                update={
                    "set_by": words * 9,
                    "reason": words * 9,
                    "levels": tuple(
                        rule.levels[0].model_copy(
                            update={
                                "percent": percent,
                                "purpose": words,
                                "holder": words,
                            }
                        )
                        for percent in (10, 30, 50, 60, 70, 80, 90, 95)
                    ),
                }
            ),
            "packages": tuple(
                p.model_copy(update={"name": words * 3}) for p in estimate.packages
            ),
            "events": tuple(
                e.model_copy(
                    update={
                        "evidence": e.evidence.model_copy(
                            update={"basis": "word " * (1500 if e.id == "R03" else 9)}
                        )
                    }
                )
                for e in estimate.events
            ),
        }
    )
    changed = second_revision().comparison
    before = dataclasses.replace(changed.earlier, revision=words)
    study = dataclasses.replace(
        run_study(long), comparison=dataclasses.replace(changed, earlier=before)
    )
    pdf = written(study, draft=True)
    pages = [plain(page.extract_text()) for page in PdfReader(io.BytesIO(pdf)).pages]
    answer = [i for i, page in enumerate(pages) if "asked for on a base" in page]

    assert len(answer) == 1
    assert "Since revision A name" in pages[answer[0]]
    assert "What to bear in mind" in pages[answer[0]]
    assert pages[answer[0] + 1].startswith("DRAFT Contents")


# ---- figures ----


def numbers_after(text, start):
    """The ten figures that follow the words of an allocation row."""
    at = re.search(rf"{re.escape(start)}\b", text)
    assert at, start
    cells = re.findall(r"(?<![\w.])[−\d][\d,]*(?: %)?|–", text[at.end() :])
    return [cell for cell in cells if "%" not in cell and cell != "–"][:8]


def thousands(cell):
    """A cell as a number of thousands."""
    return int(cell.replace(",", "").replace("−", "-"))


@pytest.fixture(scope="module")
def allocation_text(pages):
    """The text of the allocation table."""
    whole = " ".join(pages)
    start = whole.index("Allocation at P80 by package")
    return whole[start : whole.index("All lines") + 200]


def test_the_allocation_is_that_of_the_results_and_closes(
    refit, results, allocation_text
):
    """Every cell is its result to within a step, and every column adds up."""
    data = json.loads(results)
    columns = ("base", "ranges", "systemic", "events", "contingency", "expected")
    sums = [0] * 8
    for row, package in zip(data["allocation"], refit.allocation.rows, strict=True):
        start = (
            f"{row['package']} {row['name']}"
            if row["package"] != "project-wide"
            else package.name
        )
        cells = [thousands(c) for c in numbers_after(allocation_text, start)]
        assert cells[1] + cells[2] + cells[3] == cells[4], start
        assert cells[5] + cells[6] == cells[4], start
        for name, cell in zip(columns, cells, strict=False):
            assert abs(cell * STEP - row[name]) < STEP, (start, name)
        sums = [a + b for a, b in zip(sums, cells, strict=True)]
    total = [thousands(c) for c in numbers_after(allocation_text, "All lines")]

    assert sums == total
    assert total[0] * STEP == round(data["base"], -3)
    assert total[4] * STEP == round(data["target"]["contingency"], -3)
    for group in ("Hull and living quarters", "Science outfit"):
        cells = [thousands(c) for c in numbers_after(allocation_text, group)]
        assert cells[1] + cells[2] + cells[3] == cells[4]


def test_the_answer_shows_the_results_and_closes(results, pages):
    """Base, contingency, request and the three sources."""
    data = json.loads(results)
    base = round(data["base"], -3)
    contingency = round(data["target"]["contingency"], -3)
    parts = [
        thousands(re.search(rf"{name} GBP (−?[\d,]+)", pages[1])[1])
        for name in ("Estimate ranges", "Systemic risks", "Risk events")
    ]
    shares = [int(s) for s in re.findall(r"GBP [\d,]+ (\d+) %", pages[1])]

    assert f"A contingency of GBP {contingency:,.0f} is asked for" in pages[1]
    assert f"base estimate of GBP {base:,.0f}" in pages[1]
    assert f"request of GBP {base + contingency:,.0f}" in pages[1]
    assert sum(parts) == contingency
    for part, name in zip(parts, ("ranges", "systemic", "events"), strict=True):
        assert abs(part - data["split"][name]) < STEP
    assert sum(shares) == 100


def test_levels_and_percentiles_agree_wherever_they_are_printed(results, pages):
    """One level has one total, on the answer page, in the table and on the curve."""
    data = json.loads(results)
    whole = " ".join(pages)
    base = round(data["base"], -3)
    for level in data["levels"]:
        contingency = round(level["contingency"], -3)
        total = in_unit(base + contingency, UNIT)
        assert f"{in_unit(contingency, UNIT)}" in pages[1]
        assert re.search(rf"{level['level']} .{{0,80}}{total}", pages[1])
        assert f"{level['level']} {total} {in_unit(contingency, UNIT)}" in whole
        assert f"{level['level']} {(base + contingency) / 1e6:.1f}" in whole


# ---- what travels inside ----


def test_files_travel_inside_with_a_manifest(draft, results):
    """Every source byte for byte, the results, and a manifest of all others."""
    with pikepdf.open(io.BytesIO(draft)) as pdf:
        files = {
            name: pdf.attachments[name].get_file().read_bytes()
            for name in pdf.attachments
        }
        related = {str(spec.UF): str(spec.AFRelationship) for spec in pdf.Root.AF}
    manifest = json.loads(files.pop("manifest.json"))
    sources = {source.name: source.content for source in ship_refit().sources}

    assert files == {**sources, "results.json": results}
    assert related == {
        **dict.fromkeys(sources, "/Source"),
        "results.json": "/Data",
        "manifest.json": "/Data",
    }
    assert manifest["format"] == "contingency-manifest/1"
    assert manifest["fingerprint"] == ship_refit().fingerprint
    assert {one["name"]: one["sha256"] for one in manifest["files"]} == {
        name: sha256(content).hexdigest() for name, content in files.items()
    }
    assert all(one["bytes"] == len(files[one["name"]]) for one in manifest["files"])


def test_more_files_can_travel_inside(small):
    """And the manifest lists them too."""
    extra = AttachedFile(
        name="sign_offs.json", content=b"{}", description="More", relationship="Data"
    )
    with pikepdf.open(io.BytesIO(written(small, extra_attachments=[extra]))) as pdf:
        manifest = json.loads(pdf.attachments["manifest.json"].get_file().read_bytes())

        assert pdf.attachments["sign_offs.json"].get_file().read_bytes() == b"{}"
    assert "sign_offs.json" in {one["name"] for one in manifest["files"]}


def test_two_files_cannot_have_one_name(small):
    """An estimate's own results.json would be mistaken for ours."""
    mine = SourceFile(name="results.json", content=b"{}")
    estimate = small.estimate.model_copy(update={"sources": (mine,)})
    with pytest.raises(AttachmentNameTaken) as fault:
        written(
            dataclasses.replace(small, estimate=estimate),
            results=as_json(small.results()),
        )

    assert fault.value.where == "results.json"


def test_a_character_that_no_font_has_is_named(small):
    """Before anything is set; with its name and the words around it."""
    estimate = small.estimate.model_copy(update={"project": "Refit of Halcyon 🚢 now"})
    with pytest.raises(CharacterWithoutFont) as fault:
        written(dataclasses.replace(small, estimate=estimate))

    assert "SHIP" in fault.value.found
    assert "Halcyon" in fault.value.where


@pytest.mark.parametrize(
    ("number", "end"),
    [
        (1, "is in"),
        (2, "are in"),
        (10, "are in"),
        (11, "and 1 more are in"),
        (14, "and 4 more are in"),
    ],
)
def test_all_characters_without_a_font_are_named_at_once(small, number, end):
    """Up to ten; the others are counted, so that nobody runs it once for each."""
    odd = "".join(chr(0x1F680 + i) for i in range(number))
    estimate = small.estimate.model_copy(update={"project": f"Refit {odd}"})
    with pytest.raises(CharacterWithoutFont) as fault:
        written(dataclasses.replace(small, estimate=estimate))

    assert fault.value.found.count("(U+1F6") == min(number, 10)
    assert f"{end} no font of the report." in fault.value.found


# ---- the document ----


def chapters():
    """The headings of the templates, in the order of the report."""
    folder = templates_folder()
    text = (folder / ENTRY).read_text(encoding="utf-8")
    found = []
    for name in re.findall(r'include "([\w-]+\.html)"', text):
        page = (folder / name).read_text(encoding="utf-8")
        found += re.findall(r"<h1[^>]*>([^<{]+)</h1>", page)
    return found


def test_the_document_describes_itself(draft):
    """Title, language, day, tags, bookmarks of all chapters."""
    with pikepdf.open(io.BytesIO(draft)) as pdf:
        root = pdf.Root
        with pdf.open_outline() as outline:
            titles = [item.title for item in outline.root]

        assert str(root.Lang) == "en-GB"
        assert bool(root.MarkInfo.Marked)
        assert bool(root.ViewerPreferences.DisplayDocTitle)
        assert str(pdf.docinfo.Title) == (
            "Refit of the research vessel Halcyon: basis of contingency, revision C"
        )
        assert str(pdf.docinfo.CreationDate) == "D:20310520093000Z"
        assert titles[:2] == ["The answer", "Contents"]
        assert [title.split(None, 1) for title in titles[2:]] == [
            [str(number), words] for number, words in enumerate(chapters()[2:], start=1)
        ]


def test_all_letters_are_embedded_and_from_our_fonts(draft):
    """No font of the machine, and none that is only named."""
    families = ("Source-Sans-Pro", "Source-Serif-Pro", "Fallback-Sans")
    seen = set()
    with pikepdf.open(io.BytesIO(draft)) as pdf:
        for thing in pdf.objects:
            if not isinstance(thing, pikepdf.Dictionary):
                continue
            if thing.get("/Type") == "/FontDescriptor":
                assert any(key in thing for key in ("/FontFile2", "/FontFile3"))
                seen.add(str(thing.FontName).split("+", 1)[1])

    assert seen
    assert all(name.startswith(families) for name in seen), seen


def test_every_role_has_an_empty_signature_field(draft):
    """Visible, apart from one another, named by role, and no check box is left."""
    with pikepdf.open(io.BytesIO(draft)) as pdf:
        fields = list(pdf.Root.AcroForm.Fields)
        boxes = [[float(x) for x in field.Rect] for field in fields]

        assert [str(field.T) for field in fields] == [
            "sig_prepared",
            "sig_checked",
            "sig_approved",
        ]
        assert {str(field.FT) for field in fields} == {"/Sig"}
        assert not any("/V" in field for field in fields)
        assert all("/TU" in field for field in fields)
        assert "/NeedAppearances" not in pdf.Root.AcroForm
        assert "/DR" not in pdf.Root.AcroForm
    for left, bottom, right, top in boxes:
        assert right - left > 150
        assert top - bottom > 30
    assert boxes[0][1] > boxes[1][3] > boxes[1][1] > boxes[2][3]
