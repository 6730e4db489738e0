"""`insol run`: hours of sun, and the result folder."""

from __future__ import annotations

import sys
from pathlib import Path
from time import perf_counter
from typing import Any

import click


@click.command(
    epilog="""\b
Examples:
  insol run study.toml --out result
  insol run study.toml --out result --engine numpy --threads 4

A second run into the same folder asks the sky only for what has changed. A stopped run goes on
where it was stopped when the same command is given again."""
)
@click.argument("study", type=click.Path(path_type=Path))
@click.option("--out", required=True, type=click.Path(path_type=Path), metavar="DIR", help="Folder of the result.")
@click.option(
    "--engine",
    type=click.Choice(["auto", "embree", "numpy"]),
    default="auto",
    show_default=True,
    help="What casts the rays; auto takes embree where it is installed.",
)
@click.option("--threads", type=click.IntRange(1, 1024), metavar="N", help="Casts at once; all cores by default.")
@click.option("--repair", is_flag=True, help="Mend what is safe to mend in the meshes as they are read.")
def command(study: Path, out: Path, engine: Any, threads: int | None, repair: bool) -> None:
    """Find the hours of direct sun that STUDY asks for, and write them into a folder.

    The folder holds the tables faces.csv, parts.csv and spells.csv, the coloured mesh faces.ply,
    and result.json with everything that is needed to do it again.
    """
    begun = perf_counter()
    from insol.study.reading import load_study

    read = load_study(study)

    from insol.cli.progress import ProgressLine
    from insol.cli.summary import summary, warning_lines
    from insol.pipeline import run

    with ProgressLine() as progress:
        results = run(read, out=out, engine=engine, threads=threads, repair=repair, progress=progress)
    for line in warning_lines(results.warnings):
        print(line, file=sys.stderr)
    click.echo(summary(results, out, perf_counter() - begun))
