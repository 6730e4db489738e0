"""A run's findings written into a folder: tables, coloured mesh, and everything needed to do it again."""

from __future__ import annotations

import hashlib
import platform
import sys
from dataclasses import asdict
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

import numpy as np

from insol.conventions import STAND_OFF_M, stand_off
from insol.faces.model import COVERED, MEASURED
from insol.output.meshes import write_context, write_faces
from insol.output.result_folder import RESULT
from insol.output.results import PeriodResult, Results
from insol.output.tables import spells_table, write_csv
from insol.sun.clock import clock_texts
from insol.visibility.store import write_json_aside

PACKAGES = ("insol", "numpy", "scipy", "pandas", "pvlib", "shapely", "trimesh", "mapbox-earcut", "embreex")

CAUTIONS = (
    "Geometric hours under a cloudless sky: no weather, no reflections.",
    "The models stand for what they show: trees, terrain and neighbours that are not in them cast no shade.",
    "Rules on daylight, sunlight and overshadowing are local; check the current text, and leave decisions "
    "to those licensed to take them. This is not a certificate.",
)


def write_results(results: Results, folder: Path) -> None:
    """Write all files of a result into `folder`, result.json last."""
    folder.mkdir(parents=True, exist_ok=True)
    write_csv(results.table(), folder / "faces.csv")
    write_csv(results.parts(), folder / "parts.csv")
    _write_spells(results, folder / "spells.csv")
    write_faces(results, folder / "faces.ply")
    write_context(results, folder / "context.ply")
    write_json_aside(folder / RESULT, result_content(results))


def _write_spells(results: Results, path: Path) -> None:
    """Spells of the one-day periods; the header alone where there is none."""
    import pandas as pd

    site, track = results.study.site, results.track
    tables = []
    for result in results.periods:
        if result.spells is None or result.plan.day_count != 1:
            continue
        begin, end = (clock_texts(instants, result.period.clock, site, track)
                      for instants in (result.spells.begin, result.spells.end))  # fmt: skip
        dates, begins = [text[:10] for text in begin], [text[11:] for text in begin]
        tables.append(
            spells_table(
                results.scene, results.faces, result.name, result.spells, begins, [text[11:] for text in end], dates
            )
        )
    if not tables:
        columns = "measure part face name period date begin end minutes".split()
        tables = [pd.DataFrame(columns=columns)]
    write_csv(pd.concat(tables, ignore_index=True), path)


def result_content(results: Results) -> dict[str, object]:
    """Everything needed to do it again, and what came of it in short."""
    study, scene, faces = results.study, results.scene, results.faces
    return {
        "title": study.title,
        "site": asdict(study.site),
        "inputs": inputs(results),
        "conventions": {
            "frame": "the model's own x and y, z up, metres",
            "local_origin_m": scene.origin.tolist(),
            "sun": "centre of the disc; up when above the astronomical horizon; no refraction; NREL SPA through pvlib",
            "stand_off_m": stand_off(scene.extent_m, STAND_OFF_M),
            "shaded_fraction": "1 - direct / possible",
        },
        "engine": results.engine,
        "versions": versions(),
        "measures": [_measure_content(results, index) for index in range(len(faces.measure_names))],
        "periods": [period_content(result) for result in results.periods],
        "parts": [asdict(part) for part in scene.parts],
        "counts": {
            "triangles": len(scene.triangles),
            "faces": len(faces),
            "measured": int((faces.status == MEASURED).sum()),
            "covered": int((faces.status == COVERED).sum()),
            "chunks_cast": results.tally.asked,
            "chunks_found_stored": results.tally.found,
        },
        "seconds": {stage: round(seconds, 3) for stage, seconds in results.seconds.items()},
        "warnings": list(results.warnings),
        "cautions": list(CAUTIONS),
    }


def inputs(results: Results) -> list[dict[str, object]]:
    """Every file that was read, with its fingerprint."""
    study = results.study
    files: list[tuple[Path, dict[str, str]]] = [
        (model.file, {"units": model.units, "up": model.up, "role": model.role}) for model in study.models
    ]
    files += [(measure.file, {"kind": "points"}) for measure in study.measures if measure.kind == "points"]
    listed: list[dict[str, object]] = [
        {"file": str(file), "sha256": _sha256(study.path_of(file)), **facts} for file, facts in files
    ]
    if study.file is not None:
        listed.insert(0, {"file": study.file.name, "sha256": _sha256(study.file), "kind": "study"})
    return listed


def versions() -> dict[str, str]:
    """Of this program, of Python, and of what the numbers come through."""
    found = {"python": sys.version.split()[0], "system": platform.system(), "machine": platform.machine()}
    for package in PACKAGES:
        try:
            found[package] = version(package)
        except PackageNotFoundError:
            continue
    return found


def period_content(result: PeriodResult) -> dict[str, object]:
    """A period as it was asked and as it was taken."""
    period, plan = result.period, result.plan
    days = plan.intervals.resolved_days
    error = result.error_h[np.isfinite(result.error_h)]
    return {
        "name": period.name,
        "days": period.days,
        "year": period.year,
        "first_day": days[0].isoformat(),
        "last_day": days[-1].isoformat(),
        "day_count": len(days),
        "clock": period.clock,
        "from": period.start,
        "to": period.end,
        "lowest_altitude_deg": period.lowest_altitude_deg,
        "step_min": period.step_min,
        "sampling": plan.sampling,
        "sun_up_h": round(float(plan.intervals.minutes.sum()) / 60, 4),
        "error_h": {
            "median": round(float(np.median(error)), 4) if len(error) else None,
            "largest": round(float(error.max()), 4) if len(error) else None,
        },
        "notes": list(plan.intervals.notes),
    }


def _measure_content(results: Results, index: int) -> dict[str, object]:
    faces, measure = results.faces, results.study.measures[index]
    mine = faces.measure == index
    return {
        "name": measure.name,
        "kind": measure.kind,
        "spacing_m": float(faces.spacings[index]),
        "faces": int(mine.sum()),
        "covered": int((faces.status[mine] == COVERED).sum()),
        "area_m2": round(float(faces.areas[mine].sum()), 3),
    }


def _sha256(path: Path) -> str:
    digest = hashlib.sha256()
    with path.open("rb") as stream:
        while block := stream.read(1 << 20):
            digest.update(block)
    return digest.hexdigest()
