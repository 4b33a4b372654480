"""Lines of keys are those that an editor shows."""

import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contingency.estimate.toml_lines import KeyLines
from tests.estimate.good_folder import ESTIMATE

TRICKY = '''\
# [not.a.heading]
top = """
[nor] = this
""" # nor = this
"quoted \\" key" = 'a ] } # literal'
'other key'.inner = """ends in quotes\\\\"""""

[one]
list = [ # comment ]
  1, [2, 3],
  { a = 1, b = [
    { c = "}" },
  ] },
]
date = 2026-01-01T00:00:00Z
dotted . key = 1979-05-27 07:32:00

[[many]]
a = 1
[many.sub]
b = 2
[[many.deep]]
c = 3

[[many]]
a = 1
[[many.deep]]
c = 3
[[many.deep]]
d = \'\'\'
two lines\'\'\'
e = 5
'''


def leaves(value, path=()):
    """Paths of all values in a parsed TOML text."""
    if isinstance(value, dict) and value:
        for key, inner in value.items():
            yield from leaves(inner, (*path, key))
    elif isinstance(value, list) and value:
        for i, inner in enumerate(value):
            yield from leaves(inner, (*path, i))
    else:
        yield path


@pytest.mark.parametrize(
    ("path", "line"),
    [
        (("top",), 2),
        (('quoted " key',), 5),
        (("other key", "inner"), 6),
        (("one",), 8),
        (("one", "list"), 9),
        (("one", "list", 1, 0), 10),
        (("one", "list", 2, "b"), 11),
        (("one", "list", 2, "b", 0, "c"), 12),
        (("one", "date"), 15),
        (("one", "dotted", "key"), 16),
        (("many", 0, "a"), 19),
        (("many", 0, "sub", "b"), 21),
        (("many", 0, "deep", 0, "c"), 23),
        (("many", 1), 25),
        (("many", 1, "deep", 0, "c"), 28),
        (("many", 1, "deep", 1, "d"), 30),
        (("many", 1, "deep", 1, "e"), 32),
        (("one", "no such key"), 8),
        (("nowhere",), 1),
    ],
)
def test_each_key_stands_on_its_line(path, line):
    """Strings, comments and brackets of all kinds are passed over."""
    tomllib.loads(TRICKY)

    assert KeyLines(TRICKY).line(path) == line


@pytest.mark.parametrize("text", [TRICKY, ESTIMATE], ids=["tricky", "estimate"])
def test_every_value_has_a_line_of_its_own(text):
    """No path falls back on the heading above it."""
    lines = KeyLines(text)

    assert set(leaves(tomllib.loads(text))) <= set(lines._lines)


keys = st.text("ab-_1", min_size=1, max_size=3) | st.text(max_size=4).map(
    lambda text: '"' + "".join(f"\\u{ord(c) % 0xD800:04x}" for c in text) + '"'
)
scalars = st.one_of(
    st.integers(-5, 5).map(str),
    st.sampled_from(["true", "1.5", "2026-01-01", "inf", '""', "''", "'#'"]),
    st.text("ab]}#,\"'\n", max_size=6).map(
        lambda text: '"""' + text.replace('"', '\\"') + '"""'
    ),
)
values = st.recursive(
    scalars,
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda v: "[ " + ",\n  ".join(v) + " ]"),
        st.lists(st.tuples(keys, inner), max_size=2).map(
            lambda v: "{" + ", ".join(f"{k} = {x}" for k, x in v) + "}"
        ),
    ),
    max_leaves=6,
)
statements = st.one_of(
    st.tuples(keys, values).map(lambda pair: f"{pair[0]} = {pair[1]}"),
    st.lists(keys, min_size=1, max_size=2).map(lambda k: f"[{'.'.join(k)}]"),
    st.lists(keys, min_size=1, max_size=2).map(lambda k: f"[[{'.'.join(k)}]]"),
    st.just("# a comment"),
)


@settings(max_examples=300, deadline=None)
@given(st.lists(statements, max_size=8))
def test_whatever_toml_accepts_is_walked_through(lines):
    """Every value of every text that the parser takes is found."""
    text = "\n".join(lines)
    try:
        parsed = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        return

    found = KeyLines(text)

    assert set(leaves(parsed)) - {()} <= set(found._lines)
