"""The coloured mesh of the measured faces, and the mesh of all that stands around them."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from insol.output.colours import colours_of, scale_for
from insol.output.ply import write_ply

if TYPE_CHECKING:
    from insol.output.results import Results

CONTEXT_GREY = (196, 196, 194)


def write_faces(results: Results, path: Path) -> None:
    """Write every face as triangles, coloured by the first period's direct hours, all values as scalars."""
    faces = results.faces
    of_triangle = faces.outline_face
    scalars = {}
    for result in results.periods:
        scalars[f"{result.name}_direct_h"] = result.direct_h[of_triangle]
        scalars[f"{result.name}_possible_h"] = result.possible_h[of_triangle]
        scalars[f"{result.name}_shaded_fraction"] = result.shaded_fraction[of_triangle]
    first = results.periods[0]
    scale = scale_for("direct_h", first.possible_h)
    write_ply(
        path,
        faces.outlines + results.scene.origin,
        colours_of(first.direct_h, scale)[of_triangle],
        scalars=scalars,
        ints={
            "face_row": of_triangle,
            "measure": faces.measure[of_triangle],
            "part": faces.part[of_triangle],
            "face_number": faces.number[of_triangle],
            "status": faces.status[of_triangle].astype(np.int32),
        },
        comments=(
            "metres, z up, the model's own frame; face_row counts the rows of faces.csv from 0",
            f"colours: {first.name}, hours of direct sun, {scale.low:g} to {scale.high:g} h",
        ),
    )


def write_context(results: Results, path: Path) -> None:
    """Write the parts that no face was cut from, in grey."""
    scene, faces = results.scene, results.faces
    measured = np.unique(faces.part[faces.part >= 0])
    standing = ~np.isin(scene.part, measured)
    triangles = scene.vertices[scene.triangles[standing]] + scene.origin
    write_ply(
        path,
        triangles,
        np.tile(np.array(CONTEXT_GREY, dtype=np.uint8), (len(triangles), 1)),
        scalars={},
        ints={"part": scene.part[standing]},
        comments=("metres, z up, the model's own frame; what stands around the measured faces",),
    )
