"""`insol new`: a starter study for mesh files."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from insol.errors import InputError
from insol.study.keys import MODEL, SITE
from insol.study.place import Place
from insol.study.schema import Table

if TYPE_CHECKING:
    from insol.scene.model import Mesh
    from insol.study.starter import Known, ModelFacts


def checked_by(table: Table, key: str) -> Any:
    """What a click option is checked with: the study's own rule for a key."""
    value = next(row.value for row in table.keys if row.name == key)

    def check(ctx: click.Context, param: click.Parameter, given: Any) -> Any:
        return None if given is None else value.take(given, Place(param.opts[0]))

    return check


@click.command(
    epilog="""\b
Examples:
  insol new surroundings.obj proposed.obj
  insol new town.obj --units m --up y --latitude 48.3 --longitude 14.29 --time-zone Europe/Vienna

What is not given here is left in the study to be filled in; insol check says what is missing."""
)
@click.argument("models", nargs=-1, required=True, type=click.Path(path_type=Path), metavar="MODEL...")
@click.option(
    "--out",
    type=click.Path(path_type=Path),
    default=Path("study.toml"),
    show_default=True,
    metavar="FILE",
    help="The study file to write.",
)
@click.option("--force", is_flag=True, help="Replace the study file if there is one.")
@click.option("--title", default="", help="Heading of pictures and reports.")
@click.option("--units", callback=checked_by(MODEL, "units"), help="Unit of the files' numbers: mm, cm, m, in or ft.")
@click.option("--up", callback=checked_by(MODEL, "up"), help="The files' axis that points up: z or y.")
@click.option("--latitude", type=float, callback=checked_by(SITE, "latitude"), help="Degrees, north positive.")
@click.option("--longitude", type=float, callback=checked_by(SITE, "longitude"), help="Degrees, east positive.")
@click.option("--time-zone", callback=checked_by(SITE, "time_zone"), help='IANA name, or an offset such as "+05:30".')
@click.option("--elevation", type=float, callback=checked_by(SITE, "elevation_m"), help="Metres above sea level.")
@click.option("--north", type=float, callback=checked_by(SITE, "north_deg"), help="Bearing of the model's +y axis.")
@click.option("--year", type=click.IntRange(1900, 2100), help="Year of the periods; this year by default.")
def command(models: tuple[Path, ...], out: Path, force: bool, elevation: float | None, north: float | None,
            year: int | None, **known: Any) -> None:  # fmt: skip
    """Write a starter study for mesh files.

    It holds what the files tell: their parts, and their size in every unit, which no mesh file
    names. What they cannot tell, the place on earth and the unit, is left to be filled in.
    """
    refuse_target(out, force)

    from datetime import date

    from insol.scene.reading import read_mesh
    from insol.study.starter import Known, starter_study

    facts = [facts_of(path, read_mesh(path), out) for path in models]
    said = Known(**known, year=year or date.today().year, elevation_m=elevation or 0.0, north_deg=north or 0.0)
    write_whole(out, starter_study(facts, said))
    click.echo("\n".join(closing_lines(facts, said, out)))


def refuse_target(out: Path, force: bool) -> None:
    """Say no to a place where no study can be written."""
    if out.is_dir():
        raise InputError("this is a folder", where=str(out), hint="give the name of the study file")
    if out.exists() and not force:
        hint = "give another name with --out, or replace it with --force"
        raise InputError("there is such a file already", where=str(out), hint=hint)
    if not out.parent.is_dir():
        raise InputError("the folder that should hold the study does not exist", where=str(out))


def facts_of(path: Path, mesh: Mesh, out: Path) -> ModelFacts:
    """What a file tells a starter study."""
    import numpy as np

    from insol.cli.up_axis import likely_up
    from insol.scene.model import normals_and_areas
    from insol.scene.placing import extents_in_each_unit
    from insol.study.starter import ModelFacts

    corners = mesh.vertices[mesh.triangles]
    low, high = corners.min(axis=(0, 1)), corners.max(axis=(0, 1))
    return ModelFacts(
        file=relative_name(path, out.absolute().parent),
        triangle_count=len(mesh.triangles),
        part_names=mesh.part_names,
        low=(float(low[0]), float(low[1]), float(low[2])),
        high=(float(high[0]), float(high[1]), float(high[2])),
        area=float(np.sum(normals_and_areas(corners)[1])),
        plausible_units=tuple(extent.units for extent in extents_in_each_unit(mesh) if extent.plausible),
        likely_up=likely_up(mesh.vertices, mesh.triangles, mesh.part),
    )


def relative_name(path: Path, folder: Path) -> str:
    """The file's name as a study in this folder names it."""
    try:
        return Path(os.path.relpath(path, folder)).as_posix()
    except ValueError:  # another drive
        return path.absolute().as_posix()


def write_whole(path: Path, text: str) -> None:
    """Write a file aside and put it in its place when it is whole."""
    aside = path.with_name(path.name + ".unfinished")
    aside.write_text(text, encoding="utf-8", newline="\n")
    os.replace(aside, path)


def closing_lines(facts: list[ModelFacts], known: Known, out: Path) -> list[str]:
    """What was written, what it is likely to be, and what is to be filled in."""
    from insol.cli.layout import count, table
    from insol.study.starter import placed_model, size_in

    rows = []
    for model in facts:
        units = placed_model(model, known).likely_units
        size = size_in(model, units[0]) if units else "no unit makes it as large as buildings are"
        if_right = "" if known.units or not units else f"if its unit is {units[0]}"
        parts = count(len(model.part_names), "part")
        rows.append((model.file, parts, count(model.triangle_count, "triangle"), size, if_right))
    missing = [name for name in ("latitude", "longitude", "time_zone", "units") if getattr(known, name) is None]
    fill_in = [f"to be filled in there: {', '.join(missing)}"] if missing else []
    return [f"wrote {out}", table(rows, right=(1, 2)), *fill_in, f"insol check {out} says what will be read"]
