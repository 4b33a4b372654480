"""The files of earlier revisions, which travel with an estimate.

A report explains what moved since the revision before, and must be reproducible from
its own attachments.  So the files of all earlier revisions are carried among an
estimate's sources, under names that say how far back they lie:
``earlier-1-packages.csv`` is packages.csv of the revision just before.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping

from contingency.estimate.nouns import SourceFile

_NAME = re.compile(r"earlier-([1-9][0-9]{0,3})-(.+)", re.DOTALL)


def is_earlier(name: str) -> bool:
    """Whether a file belongs to an earlier revision.

    >>> is_earlier("earlier-2-packages.csv"), is_earlier("packages.csv")
    (True, False)
    """
    return _NAME.fullmatch(name) is not None


def pushed_back(sources: Iterable[SourceFile]) -> tuple[SourceFile, ...]:
    """Return the files of a revision, one revision further back.

    >>> files = [SourceFile(name=n, content=b"") for n in ("a.csv", "earlier-1-a.csv")]
    >>> [file.name for file in pushed_back(files)]
    ['earlier-1-a.csv', 'earlier-2-a.csv']
    """
    moved = []
    for source in sources:
        match = _NAME.fullmatch(source.name)
        distance, name = (int(match[1]), match[2]) if match else (0, source.name)
        moved.append(
            SourceFile(name=f"earlier-{distance + 1}-{name}", content=source.content)
        )
    return tuple(moved)


def files_of_previous(sources: Iterable[SourceFile]) -> Mapping[str, bytes]:
    """Return the files of the revision just before, and of those before that one.

    Content by name, as that revision has them; empty where none is carried.
    """
    files = {}
    for source in sources:
        match = _NAME.fullmatch(source.name)
        if match:
            distance = int(match[1]) - 1
            name = f"earlier-{distance}-{match[2]}" if distance else match[2]
            files[name] = source.content
    return files
