"""What the documents promise: every name, file, link and floor they mention."""

import importlib
import re
from pathlib import Path

import pytest

from tests.test_floors import FLOORS

ROOT = Path(__file__).parents[1]
DOCUMENTS = sorted([*ROOT.glob("*.md"), *ROOT.glob("docs/**/*.md")])

LINK = re.compile(r"\[[^\]]*\]\(([^)\s]+)\)")
NAME = re.compile(r"`(contingency(?:\.\w+)+)(?:\(.*?\))?`")
FILE = re.compile(
    r"`((?:contingency|docs|tests|report_templates|example_estimates|\.ci)/[\w./-]*)`"
)


def each_document(function):
    """Run a test once for every Markdown file that a reader may open."""
    return pytest.mark.parametrize(
        "path", DOCUMENTS, ids=lambda p: str(p.relative_to(ROOT))
    )(function)


def anchors_of(path: Path) -> set[str]:
    """Anchors of the headings of a Markdown file, as the usual viewers make them."""
    found = set()
    for line in path.read_text(encoding="utf-8").splitlines():
        if line.startswith("#"):
            heading = line.lstrip("#").strip().lower().replace("`", "")
            found.add(re.sub(r"[^\w\- ]", "", heading).replace(" ", "-"))
    return found


def named_object(name: str) -> object:
    """What a dotted name stands for: a module, or something in one."""
    parts = name.split(".")
    for cut in range(len(parts), 0, -1):
        try:
            found = importlib.import_module(".".join(parts[:cut]))
        except ModuleNotFoundError:
            continue
        for part in parts[cut:]:
            found = getattr(found, part)
        return found
    raise ModuleNotFoundError(name)


@each_document
def test_every_link_leads_somewhere(path):
    """Links to files of the checkout, and to headings in them."""
    dead = []
    for target in LINK.findall(path.read_text(encoding="utf-8")):
        if re.match(r"[a-z]+:", target):
            continue  # an address; nothing is fetched in a test
        file, _, anchor = target.partition("#")
        there = path.parent / file if file else path
        if not there.exists() or (anchor and anchor not in anchors_of(there)):
            dead.append(target)

    assert dead == []


@each_document
def test_every_name_of_the_code_exists(path):
    """A document that names a module, class or function names one that is there."""
    missing = []
    for name in NAME.findall(path.read_text(encoding="utf-8")):
        try:
            named_object(name)
        except (ModuleNotFoundError, AttributeError):
            missing.append(name)

    assert missing == []


@each_document
def test_every_file_exists(path):
    """A document that names a file of the checkout names one that is there."""
    names = FILE.findall(path.read_text(encoding="utf-8"))

    assert [name for name in names if not (ROOT / name).exists()] == []


def test_every_document_can_be_reached():
    """From the README or the developers' guide, link by link or name by name."""
    reached, open_ = set(), [ROOT / "README.md", ROOT / "DEVELOPERS.md"]
    while open_:
        path = open_.pop()
        if path in reached or path.suffix != ".md" or not path.exists():
            continue
        reached.add(path)
        text = path.read_text(encoding="utf-8")
        links = (target.partition("#")[0] for target in LINK.findall(text))
        open_ += [(path.parent / link).resolve() for link in links if link]
        open_ += [ROOT / name for name in FILE.findall(text)]

    assert sorted(set(DOCUMENTS) - reached) == []


def test_a_wrong_name_would_be_noticed():
    """The look-up above can fail."""
    assert named_object("contingency.errors.InputError").slug == "input-error"
    with pytest.raises(AttributeError):
        named_object("contingency.errors.NoSuchError")


def test_the_developers_guide_quotes_the_floors():
    """The table of DEVELOPERS.md is the table of test_floors.py."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    quoted = {}
    above = set()
    for room, allowed in re.findall(r"^\| `(\w+)` \| (.+) \|$", text, re.MULTILINE):
        quoted[room] = {
            "nothing": set(),
            "all of the above": set(above),
        }.get(allowed, set(allowed.split(", ")))
        above.add(room)

    assert quoted == {room: set(FLOORS[room]) for room in FLOORS if room[0] != "_"}
