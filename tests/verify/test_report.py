"""A whole report taken apart: what holds, and everything that must not."""

import io
import json
from contextlib import suppress

import pikepdf
import pytest

from contingency.errors import RecordError
from contingency.record.apart import Apart
from contingency.record.attachments import LARGEST_PDF, read_attachments
from contingency.record.manifest import manifest_of
from contingency.verify import report as verifying
from contingency.verify.report import Limits
from tests.office_project import LATER, SIGNERS, project
from tests.record.sample import small_report
from tests.verify.malformed import MALFORMED


@pytest.fixture(scope="module")
def apart():
    """One process for all tests; each ordinary verification starts its own."""
    with Apart(megabytes=8192) as process:
        yield process


@pytest.fixture(scope="module")
def register():
    return (project().records / "register.jsonl").read_bytes()


def verify_report(pdf, **more):
    """Without making the pages again, unless a test is about that."""
    return verifying.verify_report(
        pdf, make_again=more.pop("make_again", False), **more
    )


def outcomes(found):
    return {line.what: line.outcome for line in found.lines}


def words(found, what):
    return next(line.words for line in found.lines if line.what == what)


@pytest.fixture(scope="module")
def whole(register):
    """The sealed report, verified with everything that can be given."""
    return verify_report(
        project().sealed[3],
        when=LATER,
        register=register,
        trusted=[project().root.pem],
        make_again=True,
    )


def test_a_sealed_report_holds(whole):
    """Every line, and the bottom line says no more than that."""
    assert set(outcomes(whole).values()) == {"holds"}
    assert whole.holds
    assert whole.bottom_line == "This report holds."


def test_each_truth_is_there_by_itself(whole):
    """Files, seals, typed sign-offs, register, figures, page."""
    assert (whole.project, whole.revision) == ("A made-up project", "A")
    assert whole.files.files == 5
    assert [seal.signer for seal in whole.seals.seals] == list(SIGNERS.values())
    assert whole.typed.names[1] == "checked: Ben Sample"
    assert whole.register.entry.number == whole.note.number == 1
    assert whole.recomputed.outcome == "exactly"
    assert (whole.printed.page, whole.printed.missing) == (2, ())
    assert whole.remade.same_bytes


def test_it_is_plain_values_for_json(whole):
    """The whole answer and its bottom line."""
    data = json.loads(json.dumps(whole.as_dict()))

    assert data["holds"] is True
    assert data["bottom_line"] == "This report holds."
    assert {line["outcome"] for line in data["lines"]} == {"holds"}
    assert data["seals"]["seals"][0]["role"] == "prepared"


def test_nothing_but_the_pdf_is_needed(apart):
    """Without register and certificates these are not checked, and it is said."""
    found = verify_report(project().sealed[3], when=LATER, apart=apart)

    assert found.holds
    assert outcomes(found)["register"] == "not checked"
    assert "Nobody was asked to vouch" in found.bottom_line


def test_a_report_without_seals_says_so(apart):
    """Its figures hold; who made it, nobody knows."""
    found = verify_report(project().sealed[0], when=LATER, apart=apart)

    assert found.holds
    assert "It has no seal" in found.bottom_line


# --- Tampering ----------------------------------------------------------------------


def remade(files=None, *, pdf=None, add=None):
    """The issued report saved again with other files and a manifest that fits."""
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(pdf or project().sealed[0])) as document:
        names = list(document.Root.Names.EmbeddedFiles.Names)
        inside = dict(zip(map(str, names[::2]), names[1::2], strict=True))
        content = {
            name: (files or {}).get(name, spec.EF.F.read_bytes())
            for name, spec in inside.items()
        }
        if not add:
            old = json.loads(content.pop("manifest.json"))
            content["manifest.json"] = manifest_of(
                content, tool=old["tool"], fingerprint=old["fingerprint"]
            )
        for name, spec in inside.items():
            spec.EF.F.write(content[name])
        document.save(out)
    return out.getvalue()


def inside(name):
    return next(
        file.content
        for file in read_attachments(project().sealed[0])
        if file.name == name
    )


def test_a_replaced_file_is_noticed(apart):
    """By the manifest."""
    pdf = remade({"packages.csv": inside("packages.csv") + b"\n"}, add="no manifest")
    found = verify_report(pdf, when=LATER, apart=apart)

    assert outcomes(found)["files"] == "fails"
    assert "packages.csv differs" in words(found, "files").lower()
    assert not found.holds


def test_a_replaced_input_with_a_manifest_that_fits_is_noticed(apart, register):
    """The results are not those of the inputs, and the register knows neither."""
    changed = inside("packages.csv").replace(b"1300", b"1400")
    assert changed != inside("packages.csv")
    found = verify_report(
        remade({"packages.csv": changed}), when=LATER, apart=apart, register=register
    )

    assert outcomes(found)["files"] == "holds"
    assert outcomes(found)["computed again"] == "fails"
    assert "no line of it is of this report" in words(found, "register").lower()


def test_forged_results_are_noticed(apart):
    """Three times: computed again, on the answer page, by the typed sign-offs."""
    results = json.loads(inside("results.json"))
    results["target"]["contingency"] *= 2
    pdf = remade({"results.json": json.dumps(results).encode()})
    found = verify_report(pdf, when=LATER, apart=apart)

    assert outcomes(found)["computed again"] == "fails"
    assert "target.contingency" in words(found, "computed again")
    assert outcomes(found)["answer page"] == "fails"
    assert "bound to other results" in words(found, "typed sign-offs")
    assert found.bottom_line.startswith("This report does not hold: ")


def test_a_changed_page_is_told_even_without_a_seal(apart):
    """Every file inside is untouched, and the page says something else."""
    with pikepdf.open(io.BytesIO(project().sealed[0])) as document:
        page = document.pages[2].obj
        page.Contents = document.make_stream(b"0 0 1 rg 0 0 300 300 re f")
        out = io.BytesIO()
        document.save(out)
    found = verify_report(out.getvalue(), when=LATER, apart=apart, make_again=True)

    assert outcomes(found)["files"] == outcomes(found)["computed again"] == "holds"
    assert not found.remade.same_bytes
    assert "Compare the pages by eye" in words(found, "made again")


@pytest.mark.parametrize("results", [b"", b"[]", b"null", b"{}", b"[" * 99_999])
def test_results_that_are_none_are_a_failure_and_no_crash(apart, results):
    """Whatever stands in their place."""
    found = verify_report(remade({"results.json": results}), when=LATER, apart=apart)

    assert outcomes(found)["computed again"] == "fails"
    assert outcomes(found)["answer page"] == "fails"


def test_inputs_that_are_no_estimate_are_a_failure(apart):
    """With the first fault of the folder in words."""
    pdf = remade({"packages.csv": b"id,name,base\nP1,Piles,many\n"})
    found = verify_report(pdf, when=LATER, apart=apart)

    assert outcomes(found)["computed again"] == "fails"
    assert "packages.csv:2" in words(found, "computed again")
    assert found.printed is None
    assert not found.holds


def test_an_estimate_made_to_run_for_ever_is_given_up(register):
    """As many trials as can be asked for; the clock decides, the rest is answered."""
    text = inside("estimate.toml").decode()
    old = "trials = { least = 16384, most = 16384 }"
    assert old in text
    text = text.replace(old, "trials = { least = 16777216, most = 16777216 }")
    found = verify_report(
        remade({"estimate.toml": text.encode()}),
        when=LATER,
        register=register,
        limits=Limits(compute_seconds=3.0),
    )

    assert outcomes(found)["computed again"] == "fails"
    assert "more than 3 seconds" in words(found, "computed again")
    assert outcomes(found)["files"] == "holds"


def test_another_version_is_told_clearly(apart):
    """Reproduced or not, the reader learns which version made the report."""
    results = json.loads(inside("results.json"))
    results["tool"]["version"] = "0.0.9"
    pdf = remade({"results.json": json.dumps(results).encode()})
    found = verify_report(pdf, when=LATER, apart=apart)

    told = words(found, "computed again")
    assert "made with version 0.0.9, this is" in told
    assert outcomes(found)["computed again"] == "holds"


def test_bytes_behind_the_last_seal_are_told(apart):
    """As one line about the file."""
    found = verify_report(project().sealed[2] + b"%\n", when=LATER, apart=apart)

    assert outcomes(found)["seals"] == "fails"
    assert not found.holds


def test_a_strangers_certificate_is_not_trusted(apart):
    """The reader said whom to trust, and it is somebody else."""
    from tests.record import pki

    stranger = pki.holder("Stranger", is_authority=True)
    found = verify_report(
        project().sealed[1], when=LATER, trusted=[stranger.pem], apart=apart
    )

    assert outcomes(found)["seal, prepared"] == "fails"
    assert "Not trusted" in words(found, "seal, prepared")


# --- The register -------------------------------------------------------------------


def with_register(content, apart):
    return verify_report(project().sealed[0], when=LATER, register=content, apart=apart)


def test_a_register_without_this_report_fails(apart):
    """Cut, or another project's."""
    for content in (b"", b"{}\n"):
        found = with_register(content, apart)
        assert outcomes(found)["register"] == "fails"
        assert not found.holds


def test_a_register_rewritten_before_this_report_fails(apart, register):
    """The report carries the digest of the line before its own."""
    from contingency.record import chain

    (entry,) = chain.read_register(register).entries
    columns = {name: getattr(entry, name) for name in entry.__dataclass_fields__}
    first = chain.Entry(
        **{**columns, "revision": "0", "folder": "issued/0", "pdf": "0" * 64}
    )
    line = chain.written_line(first)
    second = chain.Entry(
        **{**columns, "number": 2, "previous": chain.read_register(line).last}
    )
    found = with_register(line + chain.written_line(second), apart)

    assert found.register.entry.number == 2
    assert "as line 1 of another register" in words(found, "register")


# --- Hostile files ------------------------------------------------------------------


@pytest.mark.parametrize("name", MALFORMED)
def test_a_malformed_pdf_neither_crashes_nor_hangs(name, apart):
    """Refused as a whole, or verified as not holding."""
    limits = Limits(read_seconds=20, seal_seconds=20, compute_seconds=20)
    holds = False
    with suppress(RecordError):  # refused as a whole
        holds = verify_report(
            MALFORMED[name](), when=LATER, apart=apart, limits=limits
        ).holds

    assert not holds


def test_there_are_fifty_malformed_pdfs():
    """And they are fifty different files."""
    assert len({MALFORMED[name]() for name in MALFORMED}) >= 50


def test_a_pdf_that_is_no_report_does_not_hold(apart):
    """A sound PDF without anything of ours in it."""
    found = verify_report(
        small_report(files={}, manifest=False), when=LATER, apart=apart
    )

    assert outcomes(found)["files"] == "fails"
    assert not found.holds


def test_a_pdf_above_the_limit_is_refused_before_it_is_read():
    """Without even starting the other process."""
    with pytest.raises(RecordError, match="more than are looked at"):
        verify_report(b"%PDF-1.7" + bytes(LARGEST_PDF), when=LATER)
