"""A small report to try the records on: one page, three fields for seals, files.

It stands in for a real report where only the shape of the PDF matters: fields named
`sig_<role>`, files with their relationship, PDF/A-3a.
"""

import datetime as dt
import io
import json
from hashlib import sha256

import pikepdf
import pydyf
from font_source_sans_pro import font_files_ttf
from weasyprint import HTML, Attachment

WHEN = dt.datetime(2026, 4, 2, 9, 30, tzinfo=dt.UTC)
ROLES = ("prepared", "checked", "approved")
FILES = {
    "estimate.toml": (b"[estimate]\n" * 30, "Source"),
    "packages.csv": (b"id,base\nP1,100\n", "Source"),
    "results.json": (b"{}\n", "Data"),
}

PAGE = """
<html lang="en-GB"><head><title>Report</title><style>
@font-face {{ font-family: "Sample"; src: url("file://{font}"); }}
body {{ font-family: "Sample"; }}
input {{ appearance: auto; display: block; width: 60mm; height: 16mm; }}
</style></head><body><h1>Report</h1><p>P80 21,384,000</p>{fields}</body></html>
"""


def manifest_of(files):
    rows = [
        {"name": name, "sha256": sha256(content).hexdigest(), "bytes": len(content)}
        for name, (content, _) in sorted(files.items())
    ]
    return json.dumps({"format": "contingency-manifest/1", "files": rows}).encode()


def small_report(*, files=None, roles=ROLES, manifest=True):
    """A report with these files (name to content and relationship) and fields."""
    files = FILES if files is None else files
    if manifest:
        files = {**files, "manifest.json": (manifest_of(files), "Data")}
    fields = "".join(
        f'<input type="checkbox" name="sig_{role}" title="Seal, {role}">'
        for role in roles
    )
    html = HTML(string=PAGE.format(font=font_files_ttf["SourceSansPro"], fields=fields))
    pdf = html.write_pdf(
        pdf_variant="pdf/a-3a",
        pdf_forms=True,
        finisher=into_seal_fields,
        attachments=[
            Attachment(
                string=content,
                name=name,
                description=name,
                created=WHEN,
                modified=WHEN,
                relationship=relationship,
            )
            for name, (content, relationship) in sorted(files.items())
        ],
    )
    return resaved(pdf)


def resaved(pdf):
    """The file as qpdf writes it: objects in small packs."""
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(pdf)) as document:
        document.save(
            out,
            object_stream_mode=pikepdf.ObjectStreamMode.generate,
            deterministic_id=True,
            compress_streams=True,
        )
    return out.getvalue()


def into_seal_fields(document, pdf):
    """Turn check boxes into empty signature fields; see docs/signing.md."""
    del document
    for thing in list(pdf.objects):
        if isinstance(thing, dict) and thing.get("FT") == "/Btn":
            thing["FT"] = "/Sig"
            for key in ("AS", "MK", "V", "Border", "DA", "Ff"):
                thing.pop(key, None)
            left, low, right, high = thing["Rect"]
            low, high = sorted((low, high))
            thing["Rect"] = pydyf.Array([left, low, right, high])
            thing["F"] = 4 | 128
            box = pydyf.Array([0, 0, right - left, high - low])
            look = pydyf.Stream(
                [], {"Type": "/XObject", "Subtype": "/Form", "BBox": box}
            )
            pdf.add_object(look)
            thing["AP"] = pydyf.Dictionary({"N": look.reference})
        is_form_tag = isinstance(thing, dict) and thing.get("S") == "/Form"
        if is_form_tag and len(thing["K"]) == 1:
            thing["K"] = thing["K"][0]
    form = pdf.catalog.get("AcroForm")
    if form is not None:
        form.pop("NeedAppearances", None)
        form.pop("DR", None)
