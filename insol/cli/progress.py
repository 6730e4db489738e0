"""How far a long run is, on one line of a terminal, with the time left."""

from __future__ import annotations

import sys
from threading import Lock
from time import perf_counter
from types import TracebackType
from typing import TextIO

from insol.cli.layout import cells, duration, terminal_width

STAGES = {
    "reading": "reading models",
    "sun": "sun positions",
    "faces": "cutting faces",
    "casting": "casting rays",
    "measuring": "adding up hours",
    "writing": "writing the result",
}
"""What people read for a stage of the pipeline."""

BAR = 30
SECONDS_BETWEEN_DRAWINGS = 0.1
SECONDS_BEFORE_A_GUESS = 1.0
"""The time left is guessed from the pace so far; a pace needs some time to show."""


class ProgressLine:
    """A line that is drawn again and again, and gone in the end; nothing where there is no terminal.

    It may be told from several threads.
    """

    def __init__(self, stream: TextIO | None = None) -> None:
        self._stream = stream or sys.stderr
        self._seen = self._stream.isatty()
        self._lock = Lock()
        self._marks = _bar_marks(self._stream)
        self._stage = ""
        self._begun = self._drawn = 0.0

    def __enter__(self) -> ProgressLine:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._seen and self._stage:
            self._write("")

    def __call__(self, stage: str, done: float, total: float) -> None:
        """Told by the pipeline: the stage, how much of it is done, and how much it is."""
        if not self._seen:
            return
        with self._lock:
            now = perf_counter()
            if stage != self._stage:
                self._stage, self._begun, self._drawn = stage, now, 0.0
            if now - self._drawn >= SECONDS_BETWEEN_DRAWINGS or done >= total:
                self._drawn = now
                part = done / total if total > 0 else 0.0
                self._write(line_of(stage, part, now - self._begun, self._marks))

    def _write(self, line: str) -> None:
        blank = " " * max(terminal_width() - 1 - cells(line), 0)
        self._stream.write(f"\r{line}{blank}\r{line}")
        self._stream.flush()


def line_of(stage: str, part: float, seconds: float, marks: str) -> str:
    """The line for a stage of which a part is done after some seconds.

    >>> line_of("casting", 0.5, 10.0, "#-")
    'casting rays        ###############---------------   50 %   10 s left'
    """
    part = min(max(part, 0.0), 1.0)
    full = round(part * BAR)
    bar = marks[0] * full + marks[1] * (BAR - full)
    guessed = 0.0 < part < 1.0 and seconds >= SECONDS_BEFORE_A_GUESS
    left = f"   {duration(seconds * (1 - part) / part, whole=True)} left" if guessed else ""
    return f"{STAGES.get(stage, stage):<18}  {bar}  {100 * part:3.0f} %{left}"


def _bar_marks(stream: TextIO) -> str:
    """Full and empty marks that the terminal can show."""
    try:
        "█░".encode(getattr(stream, "encoding", None) or "ascii")
    except (UnicodeEncodeError, LookupError):
        return "#-"
    return "█░"
