"""Mangled studies: a study or one line, never anything else."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from pathlib import Path

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from insol.errors import StudyError
from insol.study.description import Study
from insol.study.reading import load_study, study_of

# The folder is made once for all examples; each example writes the file anew.
MANY = settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=200, deadline=None)


def study_or_line(path: Path) -> None:
    line = line_of(lambda: load_study(path))
    assert line.isprintable()
    assert line == "" or str(path) in line


def line_of(read: Callable[[], Study]) -> str:
    """The line that a study is refused with, "" when it is not; any other exception is a fault of ours."""
    try:
        return "" if isinstance(read(), Study) else "no study"
    except StudyError as refused:
        return str(refused)


pieces = st.sampled_from(
    ["[", "]", "[[", '"', "'", '"""', "=", "#", "\n", "\\", "\x00", "\ufeff", "nan", "1e999", "-", ".", ",", "{", "}",
     "true", "2025-03-21", "09:00:00", "é", "\u202e", "0x", "[[[[[[[[", "site", "model", "kind"]
)  # fmt: skip


@given(st.data())
@MANY
def test_pieces_put_in_left_out_and_swapped(folder: Path, valid: str, data: st.DataObject) -> None:
    text = valid
    for _ in range(data.draw(st.integers(1, 4))):
        begin = data.draw(st.integers(0, len(text)))
        end = data.draw(st.integers(begin, min(len(text), begin + 40)))
        text = text[:begin] + data.draw(pieces | st.text(max_size=3)) + text[end:]
    path = folder / "study.toml"
    path.write_bytes(text.encode("utf-8", "surrogatepass"))
    study_or_line(path)


@given(st.binary(max_size=200), st.integers(0, 900), st.integers(0, 60))
@MANY
def test_bytes_put_in(folder: Path, valid: str, noise: bytes, at: int, left_out: int) -> None:
    data = valid.encode()
    path = folder / "study.toml"
    path.write_bytes(data[:at] + noise + data[at + left_out :])
    study_or_line(path)


odd_values = st.recursive(
    st.none().map(lambda _: "x" * 300)
    | st.booleans()
    | st.integers(-(10**30), 10**30)
    | st.floats()
    | st.text(max_size=5)
    | st.sampled_from(["m", "z", "faces", "year", "03-21", "09:00", ".", "\x00", "../surroundings.obj", "a" * 5000])
    | st.dates()
    | st.times(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.sampled_from(["name", "kind", "file", ""]), inner),
    max_leaves=5,
)


@given(st.data())
@MANY
def test_any_value_under_any_key(folder: Path, valid: str, data: st.DataObject) -> None:
    content = tomllib.loads(valid)
    tables = [content, content["site"], *content["model"], *content["measure"], *content["period"]]
    for _ in range(data.draw(st.integers(1, 2))):
        table = data.draw(st.sampled_from(tables))
        table[data.draw(st.sampled_from(sorted(table)))] = data.draw(odd_values)
    assert line_of(lambda: study_of(content, folder=folder)).isprintable()
