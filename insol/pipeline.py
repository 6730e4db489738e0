"""The stages joined: study, scene, faces, sun, casting, visibility, measures, output."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from time import perf_counter
from typing import Literal

import numpy as np

from insol.casting.engines import build
from insol.conventions import STAND_OFF_M
from insol.faces.make import make_faces
from insol.faces.model import Faces
from insol.measures.by_days import Spells
from insol.measures.period_hours import hours_of
from insol.measures.sun_hours import on_faces
from insol.output import result_folder
from insol.output.results import PeriodResult, Results
from insol.scene.assemble import load_scene
from insol.scene.model import Scene
from insol.study.description import Study
from insol.sun.position import sun_track
from insol.sun.times import span_of
from insol.visibility.answering import answer_all
from insol.visibility.identity import identity_of
from insol.visibility.plan import PeriodPlan, distinct, plan_of
from insol.visibility.receptors import Receptors, receptors_of
from insol.visibility.store import MemoryStore, Store

EngineChoice = Literal["auto", "embree", "numpy"]
Progress = Callable[[str, float, float], None]
"""Told the stage, how much of it is done, and how much it is."""


def run(
    study: Study,
    *,
    out: Path | str | None = None,
    engine: EngineChoice = "auto",
    threads: int | None = None,
    repair: bool = False,
    progress: Progress | None = None,
) -> Results:
    """Read the models, ask the sky, derive the hours, and write the result folder where one is named.

    Parameters
    ----------
    out : folder of the result; an earlier result there is replaced when the new one is whole
    threads : casts at once; all cores by default. The numbers do not depend on it.
    repair : mend what is safe to mend in the meshes as they are read

    Raises
    ------
    InputError
        The study, a model or the folder cannot be used; nothing was written.
    """
    if out is None:
        return _run(study, None, engine, threads, repair, progress)
    target = Path(out).absolute()
    result_folder.check_target(target)
    with result_folder.only_writer(target):
        return _run(study, target, engine, threads, repair, progress)


def _run(
    study: Study,
    target: Path | None,
    engine: EngineChoice,
    threads: int | None,
    repair: bool,
    progress: Progress | None,
) -> Results:
    clock = StageClock(progress)
    with clock.stage("reading"):
        scene = load_scene(study, repair=repair)
    with clock.stage("sun"):
        track = sun_track(study.site, *span_of(study.periods, study.site))
        plans = [plan_of(period, study.site, track) for period in study.periods]
    with clock.stage("faces"):
        caster = build(scene.vertices, scene.triangles, engine)
        faces = make_faces(scene, study, caster)
        receptors = receptors_of(faces, extent_m=_extent(scene, faces), stand_off_m=STAND_OFF_M)
    notes = list(scene.doubts)
    store: Store = MemoryStore()
    if target is not None:
        identity = identity_of(scene, receptors, study.site, caster.engine)
        store, note = result_folder.open_store(target, identity)
        notes += [note] if note else []
    with clock.stage("casting"):
        tally = answer_all(distinct(plans), caster, receptors, store, threads=threads, progress=clock.within)
    with clock.stage("measuring"):
        periods = tuple(_measured(plan, receptors, store, len(faces)) for plan in plans)
    results = Results(
        study=study, scene=scene, faces=faces, track=track, periods=periods, engine=caster.engine,
        warnings=tuple(notes), tally=tally, seconds=clock.seconds,
    )  # fmt: skip
    if target is not None:
        from insol.output.writing import write_results

        with clock.stage("writing"):
            write_results(results, result_folder.beside(target, ".unfinished"))
            result_folder.finish(target)
    return results


def _measured(plan: PeriodPlan, receptors: Receptors, store: Store, face_count: int) -> PeriodResult:
    hours, spells = hours_of(plan, receptors, store)
    if spells is not None:
        face = receptors.face[spells.receptor]
        order = np.lexsort((spells.begin, face))
        spells = Spells(face[order], spells.begin[order], spells.end[order])
    return PeriodResult(plan, on_faces(hours, receptors.face, face_count), spells)


def _extent(scene: Scene, faces: Faces) -> float:
    return max(scene.extent_m, float(np.abs(faces.points).max(initial=0.0)))


class StageClock:
    """Seconds by stage, and the word passed on of how far a stage is."""

    def __init__(self, progress: Progress | None) -> None:
        self.seconds: dict[str, float] = {}
        self._progress = progress
        self._stage = ""

    @contextmanager
    def stage(self, name: str) -> Iterator[None]:
        self._stage = name
        self.within(0.0, 1.0)
        begun = perf_counter()
        yield
        self.seconds[name] = perf_counter() - begun
        self.within(1.0, 1.0)

    def within(self, done: float, total: float) -> None:
        if self._progress is not None:
            self._progress(self._stage, done, total)
