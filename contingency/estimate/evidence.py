"""Evidence of a row: where its figures come from, and the files it names."""

from __future__ import annotations

import re
from typing import cast, get_args

from contingency.estimate.fault_list import Problem, shown
from contingency.estimate.faults import EvidenceMissing, EvidenceName
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import BasisKind, Evidence
from contingency.estimate.rows import Row

COLUMNS = ("basis", "basis_kind", "given_by", "given_on")

_NAMED_FILE = re.compile(r"(?<!\w)file:([^\s,;()\"]*)")


def read_evidence(row: Row, folder: EstimateFolder) -> Evidence:
    """Return the evidence of a row; files that it names are taken along."""
    carry_named_files(row, folder)
    kind = row.word("basis_kind", get_args(BasisKind))
    return Evidence(
        basis=row.text("basis"),
        kind=cast("BasisKind", kind) if kind else None,
        given_by=row.text("given_by"),
        given_on=row.day("given_on"),
    )


def carry_named_files(row: Row, folder: EstimateFolder) -> None:
    """Take along the files that the cell `basis` names as `file:NAME`."""
    for name in named_files(row.cell("basis")):
        if not name or "/" in name or "\\" in name or name.strip(".") == "":
            found = f"The file is named {shown(name)}."
            if not name:
                found = "No name stands right after file:."
            remedy = "Copy the file into the estimate folder and write its name alone."
            row.refuse("basis", Problem(EvidenceName, found, remedy))
        elif not folder.has(name):
            found = f"The folder holds no file {shown(name)}."
            remedy = "Add the file; a name after file: holds no spaces and no commas."
            row.refuse("basis", Problem(EvidenceMissing, found, remedy))
        else:
            folder.carry(name, row.place("basis"))


def named_files(basis: str) -> list[str]:
    """Return the names of the files that a basis names, in order.

    A name ends at a space, comma, semicolon or bracket; a point that ends the
    sentence is no part of it.

    Examples
    --------
    >>> named_files("Three offers: file:offers.csv, and file:survey-2.pdf.")
    ['offers.csv', 'survey-2.pdf']
    """
    return [name.rstrip(".:") for name in _NAMED_FILE.findall(basis)]
