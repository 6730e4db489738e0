"""The command `insol`: its commands by name, each imported when it is asked for."""

from __future__ import annotations

import sys
from collections.abc import Sequence
from importlib import import_module
from typing import Any

import click

from insol import __version__
from insol.cli.faults import ClosedPipe, exit_code_of, is_closed_pipe, without_traceback_option
from insol.errors import did_you_mean, listed

COMMANDS = {
    "new": "Write a starter study for mesh files.",
    "check": "Say what will be read, and what looks doubtful.",
    "run": "Find the hours of sun and write the result folder.",
    "view": "Look at a result: in a window, or as a picture.",
}
"""Every command is a module of this package that has a `command`, in the order in which people need them."""


class Commands(click.Group):
    """Commands that are imported when they are asked for, and one place where errors become a line."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = import_module(f"insol.cli.{cmd_name}").command
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        if args[0] not in COMMANDS and not args[0].startswith("-"):
            hint = did_you_mean(args[0], COMMANDS) or "commands: " + listed(COMMANDS)
            raise click.UsageError(f'there is no command "{args[0]}". {hint}', ctx=ctx)
        return super().resolve_command(ctx, args)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))

    def invoke(self, ctx: click.Context) -> Any:
        try:
            return super().invoke(ctx)
        except OSError as failed:
            # click would end the program here with a code of its own.
            if is_closed_pipe(failed):
                raise ClosedPipe from failed
            raise

    def main(
        self,
        args: Sequence[str] | None = None,
        prog_name: str | None = None,
        complete_var: str | None = None,
        standalone_mode: bool = True,
        **extra: Any,
    ) -> Any:
        """Run a command; whatever goes wrong becomes one line and an exit code."""
        given, traceback_wanted = without_traceback_option(sys.argv[1:] if args is None else list(args))
        if args is None and sys.platform == "win32":
            given = _expanded(given)
        inner = super().main

        def action() -> Any:
            return inner(given, prog_name or "insol", complete_var, standalone_mode=False, **extra)

        if not standalone_mode:
            return action()
        sys.exit(exit_code_of(action, traceback_wanted=traceback_wanted))


@click.command(
    cls=Commands,
    invoke_without_command=True,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="""\b
Begin with:
  insol new surroundings.obj proposed.obj    writes study.toml: say there where on earth, and when
  insol check study.toml                     what will be read, and what looks doubtful
  insol run study.toml --out result
  insol view result

\b
Exit codes: 0 done, 2 something given cannot be used, 1 a fault of this program.
With --traceback anywhere, or INSOL_TRACEBACK=1 set, an error shows where in the program it arose.""",
)
@click.version_option(__version__, "-V", "--version", prog_name="insol", message="%(prog)s %(version)s")
@click.pass_context
def insol(ctx: click.Context) -> None:
    """Hours of direct sun on every face of building meshes, and what stands in the way."""
    if ctx.invoked_subcommand is None:
        click.echo(ctx.get_help())


def main() -> None:
    """The entry point of the command `insol`."""
    for stream in (sys.stdout, sys.stderr):
        # A part's name may hold letters that the terminal's encoding lacks.
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    insol()


def _expanded(args: list[str]) -> list[str]:
    """Patterns such as *.obj expanded; the Windows shell leaves it to programs."""
    from glob import glob

    found: list[str] = []
    for arg in args:
        matches = sorted(glob(arg)) if any(mark in arg for mark in "*?") else []
        found += matches or [arg]
    return found
