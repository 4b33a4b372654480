"""The lines of a verification in words."""

from __future__ import annotations

from contingency.record.manifest import ManifestCheck
from contingency.record.persons import same_person
from contingency.record.seal_check import SealsCheck
from contingency.record.sign_off_file import SignOffs
from contingency.record.signature_check import Seal
from contingency.verify.comparison import Comparison
from contingency.verify.printed import PrintedCheck
from contingency.verify.verification import (
    Line,
    RegisterCheck,
    RemadeCheck,
    TypedCheck,
)


def files_line(check: ManifestCheck) -> Line:
    """Return the line about the files inside the report."""
    if not check.holds:
        return Line(what="files", outcome="fails", words=_listed(check.faults))
    return Line(
        what="files",
        outcome="holds",
        words=f"{check.files} files are inside, each as the manifest lists it.",
    )


def seal_lines(check: SealsCheck, typed: SignOffs) -> tuple[Line, ...]:
    """Return one line for each seal, and one for the file where it is odd."""
    lines = [_seal_line(seal, typed) for seal in check.seals]
    if check.faults:
        lines.insert(
            0, Line(what="seals", outcome="fails", words=_listed(check.faults))
        )
    if not check.seals and not check.faults:
        words = "The report has no seal."
        if check.open_roles:
            words = f"No seal; fields wait for {', '.join(check.open_roles)}."
        lines.append(Line(what="seals", outcome="not checked", words=words))
    return tuple(lines)


def _seal_line(seal: Seal, typed: SignOffs) -> Line:
    what = f"seal, {seal.role}"
    if not seal.is_intact:
        who = f"by {seal.signer}: " if seal.signer else ""
        return Line(what=what, outcome="fails", words=who + _listed(seal.faults))
    when = f"claimed {seal.claimed_at[:16].replace('T', ' ')}"
    if seal.stamped_at:
        when = f"time-stamped {seal.stamped_at[:16].replace('T', ' ')}"
    who = f"{seal.signer} ({seal.organisation})" if seal.organisation else seal.signer
    parts = [f"By {who}, {when}, PAdES {seal.level}; only seals came after it."]
    if seal.trusted is False:
        parts.append(f"Not trusted: {seal.distrust}.")
    elif seal.trusted:
        parts.append("A certificate that you trust vouches for the name.")
    else:
        parts.append("Nobody was asked to vouch for the name.")
    signed = next((one for one in typed.given if _same_role(one.role, seal.role)), None)
    if signed and not seal.is_test and not same_person(signed.name, seal.signer):
        parts.append(f"The typed sign-off of this role names {signed.name}.")
    return Line(
        what=what,
        outcome="fails" if seal.trusted is False else "holds",
        words=" ".join(parts),
    )


def _same_role(role: str, field: str) -> bool:
    return role.casefold().replace(" ", "_") == field


def typed_line(check: TypedCheck | None) -> Line:
    """Return the line about typed sign-offs."""
    what = "typed sign-offs"
    if check is None:
        return Line(
            what=what, outcome="not checked", words="None travel in the report."
        )
    if check.faults:
        return Line(what=what, outcome="fails", words=_listed(check.faults))
    return Line(
        what=what,
        outcome="holds",
        words=f"{'; '.join(check.names)}: bound to these inputs and results.  "
        "They are records, not signatures.",
    )


def register_line(check: RegisterCheck | None) -> Line:
    """Return the line about the register."""
    if check is None:
        return Line(what="register", outcome="not checked", words="None was given.")
    if check.faults:
        return Line(what="register", outcome="fails", words=_listed(check.faults))
    entry = check.entry
    words = f"{check.lines} lines, an unbroken chain."
    if entry:
        words += (
            f"  This report is line {entry.number}, issued on {entry.issued_at[:10]}."
        )
    return Line(what="register", outcome="holds", words=words)


def recomputed_line(comparison: Comparison) -> Line:
    """Return the line about the figures computed again."""
    what = "computed again"
    version = ""
    if not comparison.same_version:
        version = (
            f"  The report was made with version {comparison.embedded_version}, this "
            f"is {comparison.computed_version}: findings and words are not compared."
        )
    if comparison.outcome == "exactly":
        words = "Reproduced exactly." + version
        return Line(what=what, outcome="holds", words=words)
    largest = comparison.largest
    difference = ""
    if largest:
        difference = (
            f"  Largest difference, {largest.size:.0%} of what sampling allows: "
            f"{largest.figure}, {largest.embedded:,.6g} in the report, "
            f"{largest.computed:,.6g} computed."
        )
    if comparison.outcome == "within sampling error":
        words = f"Reproduced within sampling error.{difference}{version}"
        return Line(what=what, outcome="holds", words=words)
    if comparison.contradictions:
        difference = f"  {_listed(comparison.contradictions)}"
    if version:
        version += "  Compute it with the version that the report names."
    return Line(
        what=what, outcome="fails", words=f"Not reproduced.{difference}{version}"
    )


def printed_line(check: PrintedCheck) -> Line:
    """Return the line about the figures printed on the answer page."""
    what = "answer page"
    if check.holds:
        shown = "; ".join(f"{one.figure} {one.words}" for one in check.figures[:4])
        words = (
            f"Page {check.page} shows the results inside the report: {shown}.  "
            "Compare them with the page that you see."
        )
        return Line(what=what, outcome="holds", words=words)
    if not check.page:
        words = "No page shows the results inside the report."
        return Line(what=what, outcome="fails", words=words)
    missing = ", ".join(f"{one.figure} ({one.words})" for one in check.missing[:5])
    words = f"Page {check.page} does not show: {missing}."
    return Line(what=what, outcome="fails", words=words)


def remade_line(check: RemadeCheck | None) -> Line:
    """Return the line about the report made again, pages and all."""
    what = "made again"
    if check is None:
        words = "Not asked for, or no issued report whose results came out the same."
        return Line(what=what, outcome="not checked", words=words)
    if check.fault:
        words = f"It could not be made here: {check.fault}"
        return Line(what=what, outcome="not checked", words=words)
    if check.same_bytes:
        words = "Made again from the files inside: the same bytes, every page of it."
        return Line(what=what, outcome="holds", words=words)
    return Line(
        what=what,
        outcome="not checked",
        words="Made again from the files inside, its bytes differ: pages of an own "
        "templates folder, another version of a library, or a change before the first "
        "seal.  Compare the pages by eye.",
    )


def _listed(faults: tuple[str, ...]) -> str:
    """Return faults as one sentence; of many the first five."""
    more = f"; and {len(faults) - 5} more" if len(faults) > 5 else ""
    text = "; ".join(faults[:5]) + more
    return text[:1].upper() + text[1:].rstrip(".") + "."
