"""`insol view`: a result in a window, or as a picture."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

QUANTITIES = {"hours": "direct_h", "shaded": "shaded_fraction"}


@click.command(
    epilog="""\b
Examples:
  insol view result
  insol view result --period equinox --show shaded
  insol view result --picture equinox.png

In the window: drag to turn, scroll to come closer, click a face to read its hours."""
)
@click.argument("folder", type=click.Path(path_type=Path), metavar="DIR")
@click.option("--picture", type=click.Path(path_type=Path), metavar="FILE.png", help="Draw a picture, open no window.")
@click.option("--period", metavar="NAME", help="Period to show; the first by default.")
@click.option(
    "--show", type=click.Choice(list(QUANTITIES)), default="hours", show_default=True,
    help="Hours of direct sun, or the share of the possible sun that is taken.",
)  # fmt: skip
@click.option(
    "--view", "view", type=click.Choice(["bird", "plan"]), default="bird", show_default=True,
    help="Of a picture: from above at an angle, or straight down.",
)  # fmt: skip
def command(folder: Path, picture: Path | None, period: str | None, show: str, view: Any) -> None:
    """Look at the result in DIR: in a window, or as a picture.

    Needs the packages for drawing, which pip install "insol[view]" brings.
    """
    quantity: Any = QUANTITIES[show]
    if picture is None:
        from insol.output.window import show_window

        show_window(folder, period=period, quantity=quantity)
        return
    from insol.output.picture import draw_picture

    draw_picture(folder, picture, period=period, quantity=quantity, view=view)
    click.echo(f"wrote {picture}")
