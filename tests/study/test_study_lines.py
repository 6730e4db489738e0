"""The finder of lines against texts whose lines are known, and against the parser on random ones."""

from __future__ import annotations

import tomllib

from hypothesis import given
from hypothesis import strategies as st

from insol.study.lines import lines_of
from insol.study.writing import toml_value

ODD = (
    '''\
title = """
[site]   # in a string
latitude = 1
"""
a.b = [ # a list
  [1, 2], "]", # "
  { x = 1 },
]
"quoted key" = 'it''s'
'''.replace("it''s", "its")
    + """\
[site]   # comment = 1
  latitude = 2
[[measure]]
name = '''
[[measure]]
'''
[[measure]]
inner = { a = 1, b = 2 }
[measure.more]
deep = true
"""
)


def test_strings_lists_and_comments_hide_what_looks_like_keys() -> None:
    tomllib.loads(ODD)
    assert lines_of(ODD) == {
        ("title",): 1,
        ("a", "b"): 5,
        ("quoted key",): 9,
        ("site",): 10,
        ("site", "latitude"): 11,
        ("measure", 0): 12,
        ("measure", 0, "name"): 13,
        ("measure", 1): 16,
        ("measure", 1, "inner"): 17,
        ("measure", 1, "more"): 18,
        ("measure", 1, "more", "deep"): 19,
    }
    assert lines_of(ODD.replace("\n", "\r\n")) == lines_of(ODD)


names = st.text(st.characters(codec="utf-8", exclude_categories=["Cs", "Cc"]), max_size=8)
values = st.recursive(
    st.integers(-(2**40), 2**40) | st.booleans() | st.text(st.characters(exclude_categories=["Cs"])),
    lambda inner: st.lists(inner, max_size=3),
    max_leaves=6,
)


@given(st.dictionaries(names, values, max_size=5), st.lists(st.dictionaries(names, values, max_size=4), max_size=4))
def test_every_key_is_found_where_it_is_written(top: dict[str, object], tables: list[dict[str, object]]) -> None:
    top = {f"k{name}": value for name, value in top.items()}
    lines, expected = [], {}
    for name, value in top.items():
        lines.append(f"{toml_value(name)} = {toml_value(value)}")
        expected[(name,)] = len(lines)
    for index, table in enumerate(tables):
        lines.append("[[list]]")
        expected[("list", index)] = len(lines)
        for name, value in table.items():
            lines += ["# x = [", f"{toml_value(name)} = {toml_value(value)}"]
            expected[("list", index, name)] = len(lines)
    text = "\n".join(lines)
    assert tomllib.loads(text) == top | ({"list": tables} if tables else {})
    assert {steps: line for steps, line in lines_of(text).items() if not _escaped(steps)} == {
        steps: line for steps, line in expected.items() if not _escaped(steps)
    }


def _escaped(steps: tuple[str | int, ...]) -> bool:
    """Names that are written with an escape, which the finder leaves as they are written; no key of ours has one."""
    return any(isinstance(step, str) and (toml_value(step) != f'"{step}"' or "\\" in step) for step in steps) or any(
        isinstance(step, str) and step.strip("\"'") != step for step in steps
    )
