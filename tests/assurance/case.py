"""One planted fault, or one clean twin."""

from collections.abc import Callable
from dataclasses import dataclass

from contingency.estimate.nouns import Estimate
from contingency.study import Study


@dataclass(frozen=True)
class Case:
    """An estimate or a study, and what one check must say of it."""

    slug: str
    name: str
    given: Callable[[], Estimate | Study]
    severity: str | None = None
    """Severity of the first finding; None for a clean twin that passes."""
    words: str = ""
    """Words that the message must hold."""
    where: str = ""
    rows: tuple[str, ...] = ()

    def __str__(self) -> str:
        return f"{self.slug}: {self.name}"


def fault(slug, name, given, severity, words, **more):
    """A planted fault that the check must find."""
    return Case(slug, name, given, severity, words, **more)


def twin(slug, name, given):
    """A clean twin, on which the check must run and find nothing."""
    return Case(slug, name, given)
