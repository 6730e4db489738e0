"""The closing lines of a run: where the result is, and what it says in short."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from pathlib import Path

import numpy as np

from insol.cli.layout import count, duration, paragraph, table
from insol.faces.model import COVERED, MEASURED
from insol.output.results import PeriodResult, Results

MOST_WARNINGS = 12
FILES = "faces.csv  parts.csv  spells.csv  faces.ply  context.ply  result.json"


def summary(results: Results, out: Path, seconds: float) -> str:
    """A few lines for the terminal: hours of each measure and period, and what to do next."""
    faces = results.faces
    covered = int((faces.status == COVERED).sum())
    kept_out = f", {covered:,} covered and kept out" if covered else ""
    lines = [
        f"{results.study.title or 'Hours of direct sun'}: {count(len(faces), 'face')}{kept_out}, "
        f"{results.engine}, {duration(seconds)}",
        "",
        table([HEADER, *_rows(results)], right=range(2, 7)),
        "",
        f"written to {out}: {FILES}",
        f"insol view {out} shows it",
    ]
    return "\n".join(lines)


HEADER = ("measure", "period", "faces", "mean sun", "least", "most", "shaded")


def warning_lines(warnings: Sequence[str]) -> Iterator[str]:
    """The first warnings, and how many more there are."""
    for warning in warnings[:MOST_WARNINGS]:
        yield paragraph(warning, first="warning: ", indent="  ")
    if len(warnings) > MOST_WARNINGS:
        yield f"and {count(len(warnings) - MOST_WARNINGS, 'more warning')} in result.json"


def _rows(results: Results) -> Iterator[tuple[str, ...]]:
    for index, measure in enumerate(results.faces.measure_names):
        for result in results.periods:
            yield (measure, result.name, *_hours(results, index, result))


def _hours(results: Results, measure: int, result: PeriodResult) -> tuple[str, ...]:
    """Area-weighted mean, least and most hours of a measure, and its shaded fraction."""
    faces = results.faces
    mine = np.flatnonzero((faces.measure == measure) & (faces.status == MEASURED))
    if not len(mine):
        return ("0", "-", "-", "-", "-")
    # Points have no area; each counts as much as another.
    weights = faces.areas[mine] if faces.areas[mine].sum() > 0 else np.ones(len(mine))
    direct, possible = result.direct_h[mine], result.possible_h[mine]
    mean, mean_possible = np.average(direct, weights=weights), np.average(possible, weights=weights)
    shaded = f"{100 * (1 - mean / mean_possible):.0f} %" if mean_possible > 0 else "-"
    return (f"{len(mine):,}", f"{mean:,.2f} h", f"{direct.min():,.2f} h", f"{direct.max():,.2f} h", shaded)
