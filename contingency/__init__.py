"""Basis of contingency: set, defend and explain a contingency amount."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from contingency.version import VERSION

if TYPE_CHECKING:
    from contingency.estimate.reading import read_estimate
    from contingency.study import Study, run_study

__version__ = VERSION
__all__ = ["Study", "__version__", "read_estimate", "run_study"]

_HOMES = {
    "read_estimate": "contingency.estimate.reading",
    "Study": "contingency.study",
    "run_study": "contingency.study",
}


def __getattr__(name: str) -> Any:  # noqa: ANN401  (PEP 562: any public name)
    """Import the public names on first use, so that `--help` stays quick."""
    if name in _HOMES:
        from importlib import import_module

        return getattr(import_module(_HOMES[name]), name)
    msg = f"module 'contingency' has no attribute {name!r}"
    raise AttributeError(msg)
