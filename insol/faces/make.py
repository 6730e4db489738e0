"""From a scene and a study to the faces that are measured."""

from __future__ import annotations

import numpy as np

from insol.casting.contract import Caster
from insol.errors import MeasureError
from insol.faces.batches import Batch, chained_batches, faces_of_ground, faces_of_parts, faces_of_points
from insol.faces.covered import covered
from insol.faces.model import COVERED, MEASURED, Faces
from insol.faces.points_file import read_points
from insol.scene.model import Scene
from insol.study.description import FacesMeasure, GroundMeasure, Measure, Study


def make_faces(scene: Scene, study: Study, caster: Caster | None) -> Faces:
    """The faces of all measures of a study, measure by measure, part by part, surface by surface.

    Within a surface they run from the lowest row up, from left to right seen from outside.

    Parameters
    ----------
    caster : asked which faces are covered; without one all count as measured

    Raises
    ------
    MeasureError
        A measure names no part, makes too many faces or none, or its polygon or table is at fault.
    """
    if not study.measures:
        raise MeasureError("the study measures nothing", hint="add a [[measure]]")
    batches = [batch_of(scene, study, measure) for measure in study.measures]
    faces = chained_batches(batches)
    status = np.full(len(faces), MEASURED, dtype=np.uint8)
    if caster is not None:
        status[covered(faces.points, faces.normals, scene, caster)] = COVERED
    return Faces(
        points=faces.points,
        normals=faces.normals,
        areas=faces.areas,
        measure=np.repeat(np.arange(len(batches), dtype=np.int32), [len(batch) for batch in batches]),
        part=faces.part.astype(np.int32),
        number=faces.number.astype(np.int32),
        status=status,
        names=faces.names,
        outlines=faces.outlines,
        outline_face=faces.outline_face.astype(np.int32),
        measure_names=tuple(measure.name for measure in study.measures),
        spacings=np.array([getattr(measure, "spacing_m", 0.0) for measure in study.measures]),
    )


def batch_of(scene: Scene, study: Study, measure: Measure) -> Batch:
    """The faces of one measure."""
    if isinstance(measure, FacesMeasure):
        batch = faces_of_parts(scene, measure)
    elif isinstance(measure, GroundMeasure):
        batch = faces_of_ground(scene, measure)
    else:
        batch = faces_of_points(scene, read_points(study.path_of(measure.file)), study.site.north_deg)
    if not len(batch):
        raise MeasureError("there is no surface to measure", where=f'measure "{measure.name}"', hint=NOTHING_THERE)
    return batch


NOTHING_THERE = "the chosen parts have no triangle with an area, or none that faces up where ground is measured"
