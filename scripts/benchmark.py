"""Where the time goes, as ratios against peers in the same run: python scripts/benchmark.py [NAME ...]

hours     a year by hourly steps: casting and the whole run against Embree's own call on the same rays
year      the year along its rows against hourly stepping through trimesh's ray interface
accuracy  the year's error and rays a point, by rows and by steps, against edges found to a second on every day
again     another period from the stored answers; a run resumed after a kill at nine tenths
scaling   time against points, triangles, accuracy

Machines are noisy: only the ratios are to be read, never the seconds.
"""

from __future__ import annotations

import shutil
import sys
import tempfile
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from functools import partial
from pathlib import Path
from time import perf_counter
from typing import Any

import numpy as np

from insol.casting.engines import build
from insol.faces.model import COVERED, MEASURED
from insol.measures.by_days import Spells, hours_by_day
from insol.measures.by_steps import hours_by_steps
from insol.measures.by_year import YearWeights, hours_by_year
from insol.pipeline import Prepared, prepare, run
from insol.scene.obj import read_obj
from insol.study.description import FacesMeasure, Model, Period, Site, Study
from insol.sun.times import intervals_of
from insol.visibility.answering import answer_all, chunk_size, chunks_of
from insol.visibility.asking import in_front
from insol.visibility.plan import day_questions
from insol.visibility.receptors import receptors_of
from insol.visibility.steps import StepsQuestion
from insol.visibility.store import MemoryStore
from insol.visibility.year import YearQuestion

SITE = Site(latitude=50.0, longitude=10.0, time_zone="Europe/Berlin")
YEAR = Period(name="year", days="year", year=2025, step_min=60)
BLOCK_M, HEIGHTS_M = 20.0, (9.0, 45.0)
TRUTH_STEP_S = 120.0


def dense_grid(folder: Path, blocks: int, street_m: float = 12.0) -> Path:
    """An OBJ file of blocks × blocks boxes of random heights."""
    random = np.random.default_rng(20250321)
    lines = []
    for number in range(blocks * blocks):
        column, row = divmod(number, blocks)
        x, y = ((place - blocks / 2) * (BLOCK_M + street_m) for place in (column, row))
        height = random.uniform(*HEIGHTS_M)
        lines.append(f"o block-{column:03d}-{row:03d}")
        lines += [
            f"v {x + dx:.3f} {y + dy:.3f} {z:.3f}"
            for z in (0.0, height) for dx, dy in ((0, 0), (BLOCK_M, 0), (BLOCK_M, BLOCK_M), (0, BLOCK_M))
        ]  # fmt: skip
        first = 8 * number + 1
        for corners in ((0, 3, 2, 1), (4, 5, 6, 7), (0, 1, 5, 4), (1, 2, 6, 5), (2, 3, 7, 6), (3, 0, 4, 7)):
            lines.append("f " + " ".join(str(first + corner) for corner in corners))
    path = folder / f"dense-{blocks}.obj"
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def study_of(model: Path, parts: str, spacing_m: float, period: Period) -> Study:
    """A study of some blocks' faces."""
    return Study(
        title="benchmark", site=SITE, models=(Model(file=model, units="m"),), folder=model.parent, file=model,
        measures=(FacesMeasure(name="facades", parts=(parts,), spacing_m=spacing_m),), periods=(period,),
    )  # fmt: skip


def on_facades(prepared: Prepared, count: int) -> Prepared:
    """The same with `count` receptors, drawn from upright faces of blocks that have neighbours all around."""
    faces = prepared.faces
    inside = np.abs(faces.points[:, :2]).max(axis=1) < np.abs(prepared.scene.vertices[:, :2]).max() - 3 * BLOCK_M
    upright = np.flatnonzero((np.abs(faces.normals[:, 2]) < 0.1) & (faces.status == MEASURED) & inside)
    status = np.full(len(faces), COVERED, dtype=np.uint8)
    status[np.random.default_rng(7).choice(upright, count, replace=False)] = MEASURED
    chosen = replace(faces, status=status)
    receptors = receptors_of(chosen, extent_m=prepared.scene.extent_m, stand_off_m=1e-3)
    return replace(prepared, faces=chosen, receptors=receptors)


class Counting:
    """A caster that counts its rays."""

    def __init__(self, caster: Any) -> None:
        self._caster, self.rays = caster, 0
        self.engine, self.triangle_count = caster.engine, caster.triangle_count

    def __getattr__(self, name: str) -> Callable[..., Any]:
        def asked(origins: np.ndarray, *rest: Any) -> Any:
            self.rays += len(origins)
            return getattr(self._caster, name)(origins, *rest)

        return asked


def timed(work: Callable[[], Any]) -> tuple[float, Any]:
    """Seconds, and what came of it."""
    begun = perf_counter()
    found = work()
    return perf_counter() - begun, found


def hours(folder: Path) -> None:
    """100,000 points, 4,800 triangles, a year by hours."""
    model = dense_grid(folder, 20)
    study = study_of(model, "block-00[2-9]-*", 2.0, replace(YEAR, sampling="steps"))
    prepared = prepare(study)
    question: Any = prepared.plans[0].questions[0]
    receptors, caster = prepared.receptors, prepared.caster
    embree_scene = caster._scene  # type: ignore[attr-defined]
    directions = question.track.directions(question.instants)
    front = in_front(receptors.normals, directions)
    single = directions.astype(np.float32)

    def embree(threads: int) -> int:
        """Embree's own call on the same rays, a chunk of receptors at a time."""
        runs = [
            (slice(first, min(first + 8192, run.stop)), column)
            for orientation, run in receptors.segments()
            for first in range(run.start, run.stop, 8192)
            for column in np.flatnonzero(front[orientation])
        ]

        def cast(mine: list) -> None:
            for chunk, column in mine:
                embree_scene.run(receptors.origins[chunk], single[column : column + 1], query="OCCLUDED")

        with ThreadPoolExecutor(threads) as pool:
            list(pool.map(cast, [runs[n::threads] for n in range(threads)]))
        return sum(chunk.stop - chunk.start for chunk, _ in runs)

    store = MemoryStore()
    one, rays = timed(lambda: embree(1))
    two, _ = timed(lambda: embree(2))
    ours, _ = timed(lambda: answer_all([question], caster, receptors, store, threads=2))
    target = folder / "hours"
    whole, results = timed(lambda: run(study, out=target, threads=2))
    size = sum(path.stat().st_size for path in (target / "mask").rglob("*.npz")) / 1e6
    print(f"hours: {len(receptors):,} points, {caster.triangle_count:,} triangles, {rays / 1e6:,.0f} million rays")
    print(f"  embree alone, two threads against one        {one / two:5.2f} ×")
    print(f"  our casting against embree, two threads      {ours / two:5.2f} ×   (bar 1.2)")
    print(f"  the whole run against embree, two threads    {whole / two:5.2f} ×   (bar 1.6)")
    print(f"  mask on disk                                 {size:5.1f} MB  (bar 60)")
    print(f"  seconds by stage: {results.seconds}")


def year(folder: Path) -> None:
    """100,000 points along the year's rows against hourly stepping through trimesh."""
    import trimesh

    model = dense_grid(folder, 20)
    study = study_of(model, "block-00[2-9]-*", 2.0, YEAR)
    ours, results = timed(lambda: run(study, out=folder / "year"))
    prepared = prepare(replace(study, periods=(replace(YEAR, sampling="steps"),)))
    question: Any = prepared.plans[0].questions[0]
    directions = question.track.directions(question.instants)
    front = in_front(prepared.receptors.normals, directions)
    mesh: Any = trimesh.Trimesh(prepared.scene.vertices, prepared.scene.triangles, process=False)
    sampled = np.arange(0, len(directions), 24)  # one in twenty-four, and multiplied: it would take minutes

    def by_trimesh() -> int:
        rays = 0
        for column in sampled:
            facing = front[prepared.receptors.orientation, column]
            origins = prepared.receptors.origins[facing]
            mesh.ray.intersects_any(origins, np.broadcast_to(directions[column], origins.shape))
            rays += len(origins)
        return rays

    part, _ = timed(by_trimesh)
    theirs = part * len(directions) / len(sampled)
    print(f"year: {len(prepared.receptors):,} points")
    print(f"  whole run along rows against hourly stepping through trimesh  {ours / theirs:5.2f} ×   (bar 0.5)")
    print(f"  seconds by stage: {results.seconds}")


def accuracy(folder: Path) -> None:
    """2,000 points: error of the year and of its days against edges found to a second."""
    model = dense_grid(folder, 20)
    prepared = on_facades(prepare(study_of(model, "block-*", 2.0, YEAR)), 2000)
    receptors, track, caster = prepared.receptors, prepared.track, prepared.caster
    intervals = intervals_of(YEAR, SITE, track)
    days = day_questions(YEAR, SITE, track)

    def day_hours(question: Any) -> np.ndarray:
        finer = replace(question, step_s=TRUTH_STEP_S)
        stored = finer.answer(caster, receptors, lambda: None)
        spells = Spells(stored["receptor"], stored["begin"], stored["end"])
        return hours_by_day(finer, np.array([[finer.rise, finer.set]]), receptors, spells)[0].direct_h

    with ThreadPoolExecutor(2) as pool:
        truth = np.array(list(pool.map(day_hours, days)))
    print(f"accuracy: 2,000 points with {truth.sum(axis=0).mean():,.0f} h a year; rays a point, errors of year and day")
    for coarse, levels, step in ((12, 2, 1200.0), (16, 2, 600.0), (24, 2, 600.0), (24, 2, 450.0), (48, 2, 300.0)):
        question = YearQuestion(SITE.latitude, SITE.north_deg, coarse, levels, step)
        counting = Counting(caster)
        stored = question.answer(counting, receptors, lambda: None)
        found = hours_by_year(YearWeights(question, intervals, track), receptors, stored)
        chosen = range(3, len(days), 8)
        by_day = np.array([
            hours_by_year(YearWeights(question, _one_day(intervals, day), track), receptors, stored).direct_h
            for day in chosen
        ])  # fmt: skip
        _print_error(f"rows {coarse} × {2**levels}, {step / 60:g} min", counting.rays / len(receptors), found, truth,
                     by_day - truth[list(chosen)])  # fmt: skip
    for step_min in (60, 10):
        stepped = replace(YEAR, step_min=step_min)
        step_intervals = intervals_of(stepped, SITE, track)
        steps = StepsQuestion(step_intervals.middle, track)
        counting = Counting(caster)
        packed = steps.answer(counting, receptors, lambda: None)["open"]
        found = hours_by_steps(steps, step_intervals, receptors, packed)
        chosen = range(3, len(days), 8)
        each_day = []
        for day in chosen:
            mine = step_intervals.day == step_intervals.resolved_days[day].toordinal()
            single = StepsQuestion(steps.instants[mine], track)
            each_day.append(hours_by_steps(single, _one_day(step_intervals, day), receptors, packed[mine]).direct_h)
        _print_error(f"steps of {step_min} min", counting.rays / len(receptors), found, truth,
                     np.array(each_day) - truth[list(chosen)])  # fmt: skip


def _one_day(intervals: Any, day: int) -> Any:
    ordinal = intervals.resolved_days[day].toordinal()
    mine = intervals.day == ordinal
    return replace(
        intervals, start=intervals.start[mine], end=intervals.end[mine], day=intervals.day[mine],
        resolved_days=(intervals.resolved_days[day],),
    )  # fmt: skip


def _print_error(name: str, rays: float, found: Any, truth: np.ndarray, of_days: np.ndarray) -> None:
    off = np.abs(found.direct_h - truth.sum(axis=0))
    stated = found.error_h
    day = np.abs(of_days) * 60
    print(
        f"  {name:24} {rays:7,.0f} rays   mean {off.mean():6.2f} h  worst {off.max():6.1f} h   day p99 "
        f"{np.percentile(day, 99):5.1f} min   stated: median {np.median(stated):6.2f} h, "
        f"holds for {np.mean(off <= stated):.1%}"
    )


def again(folder: Path) -> None:
    """Another period of stored answers, and a resumed run."""
    model = dense_grid(folder, 20)
    study = study_of(model, "block-00[2-9]-*", 2.0, YEAR)
    target = folder / "again"
    first, results = timed(lambda: run(study, out=target))
    autumn = replace(YEAR, name="autumn", days="09-01/11-30", start="09:00", end="15:00")
    second, other = timed(lambda: run(replace(study, periods=(autumn,)), out=target))
    asked = results.seconds["casting"] + results.seconds["measuring"]
    derived = other.seconds["casting"] + other.seconds["measuring"]
    print(f"again: {len(results.faces):,} faces")
    print(f"  another period's hours from stored answers: {asked / derived:6.0f} × faster than asking  (bar 100)")
    print(f"  the whole second command:                   {first / second:6.1f} × faster than the first")
    chunks = list(chunks_of(len(results.faces), chunk_size(len(results.faces))))
    lost = max(len(chunks) // 10, 1) + 1  # a tenth was not begun, and two threads were in the middle of one each
    for path in sorted((target / "mask").glob("year-*/*.npz"))[-lost:]:
        path.unlink()
    resumed, _ = timed(lambda: run(study, out=target))
    print(
        f"  resumed at nine tenths ({lost} of {len(chunks)} chunks gone): {resumed / first:5.2f} of a whole  (bar 0.2)"
    )


def scaling(folder: Path) -> None:
    """Time of the year's rows against points and triangles."""
    model = dense_grid(folder, 20)
    prepared = prepare(study_of(model, "block-*", 2.0, YEAR))
    question = prepared.plans[0].questions[0]
    print("scaling: seconds of casting relative to the first line")
    base = None
    for count in (2000, 8000, 32000):
        some = on_facades(prepared, count)
        seconds, _ = timed(partial(answer_all, [question], some.caster, some.receptors, MemoryStore()))
        base = base or seconds
        print(f"  {count:7,} points       {seconds / base:6.2f} ×")
    base = None
    for blocks in (20, 60, 180):
        mesh = read_obj(dense_grid(folder, blocks))
        caster = build(mesh.vertices, mesh.triangles)
        some = on_facades(prepared, 8000)
        seconds, _ = timed(partial(answer_all, [question], caster, some.receptors, MemoryStore()))
        base = base or seconds
        print(f"  {len(mesh.triangles):7,} triangles    {seconds / base:6.2f} ×")


BENCHMARKS = {work.__name__: work for work in (hours, year, accuracy, again, scaling)}


def main(names: list[str]) -> int:
    """Run the benchmarks named, or all."""
    unknown = [name for name in names if name not in BENCHMARKS]
    if unknown:
        print(f"no benchmark is called {unknown[0]}; there are {', '.join(BENCHMARKS)}", file=sys.stderr)
        return 2
    folder = Path(tempfile.mkdtemp(prefix="insol-benchmark-"))
    try:
        for name in names or BENCHMARKS:
            BENCHMARKS[name](folder)
    finally:
        shutil.rmtree(folder, ignore_errors=True)
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
