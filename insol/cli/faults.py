"""Errors as one line on stderr and an exit code; the only place where it happens."""

from __future__ import annotations

import errno
import os
import sys
import traceback
from collections.abc import Callable
from contextlib import suppress

import click

from insol.errors import InsolError, did_you_mean, one_line, printable

DONE, OUR_FAULT, INPUT_AT_FAULT, INTERRUPTED, PIPE_CLOSED = 0, 1, 2, 130, 141
"""The last two are 128 and the number of the signal that says the same, as shells have it."""

TRACEBACK_OPTION = "--traceback"
TRACEBACK_VARIABLE = "INSOL_TRACEBACK"

STOPPED = "stopped. an earlier result is untouched; a stopped run goes on when it is given again"

_OS_HINTS = {
    errno.ENOSPC: "free some space, or write to another place",
    errno.EDQUOT: "free some space, or write to another place",
    errno.EACCES: "the folder or file is not yours to read or write",
    errno.EPERM: "the folder or file is not yours to read or write",
    errno.EROFS: "write to another place",
    errno.ENOENT: "it was there before, or its folder is missing",
    errno.EMFILE: "the system allows too few open files (ulimit -n)",
}
"""Faults of the machine's own that people can mend."""


class ClosedPipe(Exception):
    """The reader of our output has gone."""


def without_traceback_option(args: list[str]) -> tuple[list[str], bool]:
    """The arguments without --traceback, and whether it or its variable asks for tracebacks."""
    end = args.index("--") if "--" in args else len(args)
    kept = [arg for arg in args[:end] if arg != TRACEBACK_OPTION] + args[end:]
    return kept, len(kept) < len(args) or bool(os.environ.get(TRACEBACK_VARIABLE))


def exit_code_of(action: Callable[[], object], *, traceback_wanted: bool) -> int:
    """Do something; say in one line what went wrong, and give the exit code."""
    try:
        code = action()
        sys.stdout.flush()
        return code if isinstance(code, int) else DONE
    except BaseException as failed:
        if isinstance(failed, SystemExit):
            raise
        if isinstance(failed, ClosedPipe) or is_closed_pipe(failed):
            return _leave_quietly()
        if traceback_wanted:
            traceback.print_exception(failed)
        line, code = line_and_code(failed)
        print(f"insol: {line}", file=sys.stderr)
        return code


def line_and_code(failed: BaseException) -> tuple[str, int]:
    """What to say of an exception, and the exit code that it stands for."""
    if isinstance(failed, InsolError):
        return str(failed), failed.exit_code
    if isinstance(failed, click.ClickException):
        return printable(_usage_line(failed)), failed.exit_code
    if isinstance(failed, (KeyboardInterrupt, click.Abort)):
        return STOPPED, INTERRUPTED
    if isinstance(failed, MemoryError):
        hint = "a larger spacing_m, fewer parts or a shorter period needs less"
        return one_line("", "the memory of this machine does not suffice", hint), INPUT_AT_FAULT
    if isinstance(failed, OSError) and failed.strerror:
        where = str(failed.filename or "")
        return one_line(where, failed.strerror, _OS_HINTS.get(failed.errno or 0, "")), INPUT_AT_FAULT
    hint = f"this is a fault of the program; {TRACEBACK_OPTION} shows where it arose"
    return one_line("", f"{type(failed).__name__}: {failed}", hint), OUR_FAULT


def _usage_line(failed: click.ClickException) -> str:
    """A mistake on the command line in one line, with the command whose help tells more."""
    said = failed.format_message()
    if isinstance(failed, click.NoSuchOption):
        params = failed.ctx.command.get_params(failed.ctx) if failed.ctx is not None else []
        known = [name for param in params for name in param.opts if name.startswith("--")]
        hint = did_you_mean(failed.option_name, known)
        said = f"there is no option {failed.option_name}" + (f"; {hint}" if hint else "")
    said = " ".join(said.split()).rstrip(".")
    said = said[:1].lower() + said[1:]
    context = failed.ctx if isinstance(failed, click.UsageError) else None
    return f"{said} ({context.command_path} --help tells more)" if context is not None else said


def is_closed_pipe(failed: BaseException) -> bool:
    """Whether the reader of our output has gone, such as `head` when it has enough."""
    return isinstance(failed, BrokenPipeError) or (
        # Windows says so in other words.
        sys.platform == "win32" and isinstance(failed, OSError) and failed.errno == errno.EINVAL
    )


def _leave_quietly() -> int:
    """Let nothing be written to the closed pipe when Python ends."""
    with suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return PIPE_CLOSED
