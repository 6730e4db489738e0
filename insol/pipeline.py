"""The stages joined: study, scene, faces, sun, casting, visibility, measures, output."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from time import perf_counter

import numpy as np

from insol.casting.contract import Caster
from insol.casting.engines import EngineChoice, build
from insol.conventions import STAND_OFF_M
from insol.errors import MeasureError, PeriodError
from insol.faces.make import make_faces
from insol.faces.model import Faces
from insol.measures.by_days import Spells
from insol.measures.period_hours import hours_of
from insol.measures.sun_hours import on_faces
from insol.output import result_folder
from insol.output.results import PeriodResult, Results
from insol.scene.assemble import load_scene_and_health
from insol.scene.health import PartHealth
from insol.scene.model import Scene
from insol.study.description import Period, Study
from insol.study.writing import check_study
from insol.sun.position import SunTrack, sun_track
from insol.sun.times import span_of
from insol.visibility.answering import answer_all
from insol.visibility.identity import identity_of
from insol.visibility.plan import PeriodPlan, distinct, plan_of
from insol.visibility.receptors import Receptors, receptors_of
from insol.visibility.store import MemoryStore, Store

Progress = Callable[[str, float, float], None]
"""Told the stage, how much of it is done, and how much it is."""


@dataclass(frozen=True)
class Prepared:
    """Everything that a run knows before it asks the sky."""

    study: Study
    scene: Scene
    health: tuple[PartHealth, ...]  # of each part of the scene
    caster: Caster
    faces: Faces
    receptors: Receptors
    track: SunTrack
    plans: tuple[PeriodPlan, ...]


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
        The study, a model or the folder cannot be used; an earlier result is untouched.
    """
    clock = StageClock(progress)
    if out is None:
        return _answered(prepare(study, engine=engine, repair=repair, clock=clock), MemoryStore(), threads, clock, ())
    target = Path(out).resolve()  # through links: what they point to is replaced, not they
    result_folder.check_target(target)
    prepared = prepare(study, engine=engine, repair=repair, clock=clock)
    with result_folder.only_writer(target):
        return _into_folder(prepared, target, threads, clock)


def prepare(
    study: Study, *, engine: EngineChoice = "auto", repair: bool = False, clock: StageClock | None = None
) -> Prepared:
    """Read the models, follow the sun, cut the faces: all of a run but its rays."""
    clock = clock or StageClock(None)
    study = study if study.file is not None else check_study(study)
    with clock.stage("reading"):
        scene, health = load_scene_and_health(study, repair=repair)
    with clock.stage("sun"):
        track = sun_track(study.site, *span_of(study.periods, study.site))
        plans = tuple(_plan(period, study, track) for period in study.periods)
    with clock.stage("faces"):
        caster = build(scene.vertices, scene.triangles, engine)
        faces = _faces(scene, study, caster)
        extent = max(scene.extent_m, float(np.abs(faces.points).max(initial=0.0)))
        receptors = receptors_of(faces, extent_m=extent, stand_off_m=STAND_OFF_M)
    return Prepared(study, scene, health, caster, faces, receptors, track, plans)


def _faces(scene: Scene, study: Study, caster: Caster) -> Faces:
    try:
        return make_faces(scene, study, caster)
    except MeasureError as refused:
        raise MeasureError(refused.what, where=_in_study(study, refused.where), hint=refused.hint) from None


def _in_study(study: Study, where: str) -> str:
    return f"{study.file.name}: {where}" if study.file is not None and where.startswith("measure ") else where


def _plan(period: Period, study: Study, track: SunTrack) -> PeriodPlan:
    try:
        return plan_of(period, study.site, track)
    except PeriodError as refused:
        file = f"{study.file.name}: " if study.file is not None else ""
        raise PeriodError(refused.what, where=f'{file}period "{period.name}"', hint=refused.hint) from None


def _into_folder(prepared: Prepared, target: Path, threads: int | None, clock: StageClock) -> Results:
    """Answers stored beside the target, which the whole result replaces at the end."""
    identity = identity_of(prepared.scene, prepared.receptors, prepared.study.site, prepared.caster.engine)
    store, note = result_folder.open_store(target, identity)
    results = _answered(prepared, store, threads, clock, (note,) if note else ())
    from insol.output.writing import write_results

    with clock.stage("writing"):
        write_results(results, result_folder.beside(target, ".unfinished"))
        result_folder.finish(target)
    return results


def _answered(
    prepared: Prepared, store: Store, threads: int | None, clock: StageClock, notes: tuple[str, ...]
) -> Results:
    """Ask what is not stored, and derive every period's hours."""
    receptors, plans = prepared.receptors, prepared.plans
    with clock.stage("casting"):
        tally = answer_all(distinct(plans), prepared.caster, receptors, store, threads=threads, progress=clock.within)
    with clock.stage("measuring"):
        periods = tuple(_measured(plan, prepared, store) for plan in plans)
    return Results(
        study=prepared.study, scene=prepared.scene, faces=prepared.faces, track=prepared.track, periods=periods,
        engine=prepared.caster.engine, warnings=(*prepared.scene.doubts, *notes), tally=tally, seconds=clock.seconds,
    )  # fmt: skip


def _measured(plan: PeriodPlan, prepared: Prepared, store: Store) -> PeriodResult:
    hours, spells = hours_of(plan, prepared.receptors, store, prepared.track)
    if spells is not None:
        face = prepared.receptors.face[spells.receptor]
        order = np.lexsort((spells.begin, face))
        spells = Spells(face[order], spells.begin[order], spells.end[order])
    return PeriodResult(plan, on_faces(hours, prepared.receptors.face, len(prepared.faces)), spells)


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
