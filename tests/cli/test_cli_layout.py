"""Text laid out for a terminal fits it, and numbers keep the digits they deserve."""

from __future__ import annotations

import io

from hypothesis import given
from hypothesis import strategies as st

from insol.cli.layout import cells, large, table
from insol.cli.progress import ProgressLine, line_of

words = st.text(max_size=80)


@given(st.lists(st.tuples(words, words, st.integers(0, 10**6).map(str)), min_size=1, max_size=5), st.integers(60, 120))
def test_a_table_fits_its_width_and_keeps_its_numbers(rows: list[tuple[str, str, str]], width: int) -> None:
    lines = table(rows, right=(2,), width=width).split("\n")
    assert len(lines) == len(rows)
    for line, row in zip(lines, rows, strict=True):
        assert cells(line) <= width
        assert line.endswith(row[2])


def test_columns_are_aligned_whatever_the_script() -> None:
    lines = table([("塔", "1"), ("tower", "20")], right=(1,), width=60).split("\n")
    assert lines == ["  塔      1", "  tower  20"]
    assert cells("e\u0301") == 1


def test_large_counts_in_words() -> None:
    assert [large(12), large(1_500_000), large(3_200_000_000)] == ["12", "1.5 million", "3.2 billion"]


class Terminal(io.StringIO):
    encoding = "utf-8"

    def isatty(self) -> bool:
        return True


def test_progress_is_drawn_on_a_terminal_and_gone_in_the_end() -> None:
    terminal = Terminal()
    with ProgressLine(terminal) as progress:
        progress("casting", 0, 4)
        progress("casting", 4, 4)
    said = terminal.getvalue()
    assert "casting rays" in said
    assert "100 %" in said
    assert said.endswith("\r")
    assert "\n" not in said


def test_progress_says_nothing_where_there_is_no_terminal() -> None:
    file = io.StringIO()
    with ProgressLine(file) as progress:
        progress("casting", 1, 4)
    assert file.getvalue() == ""


def test_progress_does_not_draw_more_often_than_eyes_see() -> None:
    terminal = Terminal()
    with ProgressLine(terminal) as progress:
        for done in range(100_000):
            progress("casting", done, 100_001)
    assert terminal.getvalue().count("casting rays") < 200


def test_the_time_left_is_guessed_once_there_is_a_pace() -> None:
    assert "left" not in line_of("casting", 0.0, 5.0, "#-")
    assert "left" not in line_of("casting", 0.5, 0.5, "#-")
    assert line_of("casting", 0.25, 30.0, "#-").endswith("25 %   1:30 min left")
    assert "left" not in line_of("casting", 1.0, 30.0, "#-")
