"""`insol check`: what will be read, and what looks doubtful."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import click

STUDY_ENDING = ".toml"


@click.command(
    epilog="""\b
Examples:
  insol check study.toml
  insol check surroundings.obj proposed.obj

Doubts are warnings: the exit code is 0 all the same."""
)
@click.argument("paths", nargs=-1, required=True, type=click.Path(path_type=Path), metavar="STUDY|MODEL...")
@click.option("--all", "every", is_flag=True, help="List every part and every doubt, not only the first.")
def command(paths: tuple[Path, ...], every: bool) -> None:
    """Say what will be read from a study or from models, and what looks doubtful.

    Of a study: the site and its sun, the parts with their size in metres, what is measured, how
    many rays it takes. Of models alone: their parts, and their size in every unit.
    """
    studies = [path for path in paths if path.suffix.lower() == STUDY_ENDING or path.is_dir()]
    if studies and len(paths) > 1:
        raise click.UsageError("one study or some models can be checked, not both together")
    lines = study_lines(studies[0], every) if studies else model_lines(paths, every)
    click.echo("\n".join(lines))


def study_lines(path: Path, every: bool) -> list[str]:
    """Everything that is to be said of a study."""
    from insol.study.reading import load_study

    study = load_study(path)

    from insol.cli import model_report, sun_report
    from insol.cli.progress import ProgressLine
    from insol.pipeline import StageClock, prepare

    with ProgressLine() as progress:
        ready = prepare(study, clock=StageClock(progress))
    return [
        f"{study.title or path.stem}  ({path})",
        *sun_report.site_lines(study),
        *model_report.models_lines(study, ready.scene, ready.health),
        *model_report.parts_lines(ready.scene, ready.health, every),
        *model_report.measures_lines(study, ready.faces),
        *sun_report.periods_lines(study, ready.plans, ready.track),
        *sun_report.cost_lines(ready.plans, ready.faces),
        *model_report.doubts_lines(
            [*ready.scene.doubts, *model_report.axis_doubts(study, ready.scene), *sun_report.site_doubts(study),
             *model_report.part_doubts(ready.scene, every)], every,
        ),
    ]  # fmt: skip


def model_lines(paths: Sequence[Path], every: bool) -> list[str]:
    """Everything that is to be said of models without a study."""
    from insol.cli import model_report
    from insol.scene.reading import read_mesh

    lines: list[str] = []
    for path in paths:
        mesh = read_mesh(path)
        lines += [*model_report.file_lines(path, mesh, every), ""]
    return [*lines, f"insol new {' '.join(str(path) for path in paths)} writes a starter study"]
