"""Draws the domain of one window of the demo: where on its rows of declination the sky is open."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

from insol.pipeline import prepare
from insol.study.description import Period
from insol.study.reading import load_study
from insol.visibility.lattice import HALF_TURN_S, PLACE_S
from insol.visibility.tracing import front_windows
from insol.visibility.year import YearQuestion

SAMPLES = Path(__file__).resolve().parent.parent / "sample_models"


def main() -> int:
    """Write sample_models/pictures/rows.png."""
    from dataclasses import replace

    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    study = load_study(SAMPLES / "study.toml")
    windows = next(measure for measure in study.measures if measure.kind == "points")
    prepared = prepare(replace(study, measures=(windows,), periods=(Period(name="year", days="year", year=2025),)))
    question = YearQuestion(study.site.latitude, study.site.north_deg)
    everyone = question.answer(prepared.caster, prepared.receptors, lambda: None)
    liveliest = int(everyone["count"].sum(axis=0).argmax())
    receptors = prepared.receptors.piece(liveliest, liveliest + 1)
    answer = question.answer(prepared.caster, receptors, lambda: None)
    rows = question.rows()
    figure = Figure(figsize=(9, 5), dpi=150, facecolor="#fbfaf8")
    FigureCanvasAgg(figure)
    axes = figure.add_axes((0.09, 0.12, 0.88, 0.76), facecolor="#dedad4")
    number = np.repeat(np.arange(len(rows)), answer["count"][:, 0])
    for row, begin, end in zip(number, answer["begin"], answer["end"], strict=True):
        path = rows[row]
        visits = front_windows(receptors.normals, path)
        bounds = float(visits.begin.min()), float(visits.end.max())
        first, last = (np.clip(place * PLACE_S - HALF_TURN_S, *bounds) / 240 for place in (begin, end))
        traced = row % (1 << question.levels) == 0
        axes.plot([first, last], [path.declination] * 2, color="#e0b400" if traced else "#f0d860", lw=1.6, zorder=2)
        axes.plot([first, last], [path.declination] * 2, ".", color="#00224e", ms=2.5, zorder=3)
    axes.plot([path.set / 240 for path in rows], [path.declination for path in rows], color="#5b5853", lw=1)
    axes.plot([path.rise / 240 for path in rows], [path.declination for path in rows], color="#5b5853", lw=1)
    axes.set(xlim=(-135, 135), ylim=(-25, 25), xlabel="hour angle, degrees (noon 0, afternoon positive)")
    axes.set_ylabel("declination, degrees")
    axes.set_title("Open sky on the year's rows, one window; darker rows were traced whole", size=10, loc="left")
    figure.savefig(SAMPLES / "pictures" / "rows.png", metadata={"Software": None})
    return 0


if __name__ == "__main__":
    sys.exit(main())
