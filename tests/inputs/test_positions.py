"""Lines of keys in TOML texts of every form, counted by eye."""

import tomllib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from coldwork.inputs.positions import KeyPath, line_of, lines_of

TEXT = '''\
# c [x]
[a]
b.c = 1 # z
"d e" = { value = 3, u = [1,
  2, { q = 7 }], 'w' = "] = [" }
f = [
  { angle = 1 },
  { angle = 2, z = """
x = 1
[no] """ },
]
[[t]]
id = "x"
[[t]]
id = "y" # [[
n = 2027-03-31 07:00:00.5
[t.sub]
k = -1.5e3
[ "q.r" . s ]
v = \'\'\'a
b = 2\'\'\'
w = true
[[t]]
m = []
g = {}
last = 0x1F'''


@pytest.mark.parametrize(
    ("path", "line"),
    [
        (("a",), 2),
        (("a", "b"), 3),
        (("a", "b", "c"), 3),
        (("a", "d e"), 4),
        (("a", "d e", "value"), 4),
        (("a", "d e", "u", 0), 4),
        (("a", "d e", "u", 1), 5),
        (("a", "d e", "u", 2, "q"), 5),
        (("a", "d e", "w"), 5),
        (("a", "f", 0, "angle"), 7),
        (("a", "f", 1, "z"), 8),
        (("t",), 12),
        (("t", 0), 12),
        (("t", 0, "id"), 13),
        (("t", 1), 14),
        (("t", 1, "n"), 16),
        (("t", 1, "sub"), 17),
        (("t", 1, "sub", "k"), 18),
        (("q.r", "s"), 19),
        (("q.r", "s", "v"), 20),
        (("q.r", "s", "w"), 22),
        (("t", 2, "m"), 24),
        (("t", 2, "last"), 26),
    ],
)
def test_finds_the_line_of_a_key(path: KeyPath, line: int) -> None:
    assert tomllib.loads(TEXT)
    assert lines_of(TEXT)[path] == line


def test_a_missing_key_is_named_by_what_is_around_it() -> None:
    lines = lines_of(TEXT)
    assert line_of(lines, ("t", 1, "nothing")) == 14
    assert line_of(lines, ("a", "b", "d", "e")) == 3
    assert line_of(lines, ("nothing", "at", "all")) is None


def test_every_leaf_of_the_text_has_a_line() -> None:
    lines = lines_of(TEXT)
    open_values: list[tuple[KeyPath, object]] = [((), tomllib.loads(TEXT))]
    while open_values:
        path, value = open_values.pop()
        assert not path or path in lines, path
        items = (
            value.items()
            if isinstance(value, dict)
            else enumerate(value)
            if isinstance(value, list)
            else ()
        )
        open_values += [((*path, key), inner) for key, inner in items]


@given(st.text(alphabet="ab=[]{},.\"'#\n \\1", max_size=60))
def test_never_fails_whatever_the_text(text: str) -> None:
    assert isinstance(lines_of(text), dict)
