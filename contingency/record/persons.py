"""Whether two names may be one person's: preparer and checker must not be."""

from __future__ import annotations

import re
import unicodedata

TITLES = frozenset({"dr", "mr", "mrs", "ms", "mx", "prof", "sir", "dame", "ir", "ing"})
"""Left out when two names are compared.  Common practice, no source."""

MOST_PARTS = 8
"""Parts of a name that are looked at; more are no name."""


def same_person(one: str, other: str) -> bool:
    """Return whether two names may be one person's.

    Case, accents, titles, punctuation and the order of the parts do not matter.  A
    part that is one letter stands for any part that begins with it, so that
    initials do not make a second person.

    >>> same_person("Dr. Zoë de Wit", "WIT, Zoe de")
    True
    >>> same_person("Z. de Wit", "Zoë de Wit"), same_person("A. Berg", "Zoë Berg")
    (True, False)
    """
    mine, theirs = name_parts(one), name_parts(other)
    shorter, longer = sorted((mine, theirs), key=len)
    return bool(shorter) and _matches(shorter, longer)


def _matches(shorter: tuple[str, ...], longer: tuple[str, ...]) -> bool:
    """Whether each part of the shorter name finds a part of its own in the longer."""
    if not shorter:
        return True
    first, rest = shorter[0], shorter[1:]
    for i, part in enumerate(longer):
        alike = first == part or (1 in {len(first), len(part)} and first[0] == part[0])
        if alike and _matches(rest, longer[:i] + longer[i + 1 :]):
            return True
    return False


def name_parts(name: str) -> tuple[str, ...]:
    """Return the parts of a name as they are compared, longest first.

    >>> name_parts("Dr. Zoë de Wit")
    ('wit', 'zoe', 'de')
    """
    plain = unicodedata.normalize("NFKD", name)
    plain = "".join(c for c in plain if not unicodedata.combining(c)).casefold()
    words = re.findall(r"[^\W\d_]+", plain)
    kept = [word for word in words if word not in TITLES] or words
    return tuple(sorted(kept, key=lambda word: (-len(word), word)))[:MOST_PARTS]
