"""The manifest of a report: name, length and SHA-256 of every file inside the PDF.

    {"format": "contingency-manifest/1",
     "files": [{"name": "packages.csv", "bytes": 512, "sha256": "9f..."}, ...]}

More keys may stand in it.  The manifest lists every file but itself.
"""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from hashlib import sha256
from typing import Any

from contingency.record.attachments import Attachment

NAME = "manifest.json"
FORMAT = "contingency-manifest/1"


@dataclass(frozen=True, kw_only=True, slots=True)
class ManifestCheck:
    """How the files inside a report compare with its manifest."""

    files: int
    """Files that the manifest lists."""
    faults: tuple[str, ...]
    """Each file that is missing, differs, or is not listed, in words."""

    @property
    def holds(self) -> bool:
        """Whether every file is there, unchanged, and nothing else is."""
        return not self.faults


def manifest_of(files: Mapping[str, bytes], **more: object) -> bytes:
    """Return the bytes of a manifest: files by name, and further keys as given."""
    data = {
        "format": FORMAT,
        **more,
        "files": [
            {
                "name": name,
                "bytes": len(content),
                "sha256": sha256(content).hexdigest(),
            }
            for name, content in sorted(files.items())
        ],
    }
    return (json.dumps(data, indent=1, ensure_ascii=False) + "\n").encode()


def check_manifest(attachments: Sequence[Attachment]) -> ManifestCheck:
    """Hold the files of a report against the manifest among them."""
    files = {file.name: file.content for file in attachments}
    manifest = files.pop(NAME, None)
    if manifest is None:
        return ManifestCheck(files=0, faults=(f"{NAME} is missing",))
    try:
        listed = _listed(manifest)
    except (ValueError, KeyError, TypeError, RecursionError):
        return ManifestCheck(files=0, faults=(f"{NAME} cannot be read",))
    faults = []
    for name, (length, digest) in listed.items():
        if name not in files:
            faults.append(f"{name} is missing")
        elif (len(files[name]), sha256(files[name]).hexdigest()) != (length, digest):
            faults.append(f"{name} differs")
    faults += [f"{name} is not listed" for name in files if name not in listed]
    return ManifestCheck(files=len(listed), faults=tuple(sorted(faults)))


def _listed(manifest: bytes) -> dict[str, tuple[int, str]]:
    data: dict[str, Any] = json.loads(manifest)
    if data["format"] != FORMAT:
        raise ValueError(data["format"])
    rows = [(row["name"], (row["bytes"], row["sha256"])) for row in data["files"]]
    if len(dict(rows)) != len(rows):
        raise ValueError("a name twice")
    return dict(rows)
