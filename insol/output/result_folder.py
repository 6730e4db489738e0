"""The result folder: written aside, renamed when whole, one writer at a time.

DIR.unfinished/   grows while a run goes on; a stopped run goes on from there
DIR/              a whole result; replaced by the next whole one, never half overwritten
"""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from insol.errors import ResultError
from insol.visibility.identity import Identity, identity_content, read_identity
from insol.visibility.store import FolderStore, write_json_aside

MASK = "mask"
RESULT = "result.json"


def check_target(target: Path) -> None:
    """Say no to a folder that holds something else than a result.

    Raises
    ------
    ResultError
        It is a file, holds other things, or its parent folder does not exist.
    """
    if target.is_dir():
        if any(target.iterdir()) and not (target / RESULT).is_file():
            raise ResultError(
                "the folder is not empty and holds no result of this program", where=str(target),
                hint="give a new folder, or empty this one",
            )  # fmt: skip
    elif target.exists():
        raise ResultError("this is a file, not a folder", where=str(target), hint="give another name")
    elif not target.parent.is_dir():
        raise ResultError("the folder that should hold the result does not exist", where=str(target.parent))


def beside(target: Path, ending: str) -> Path:
    """A path next to the target."""
    return target.with_name(target.name + ending)


@contextmanager
def only_writer(target: Path) -> Iterator[None]:
    """Hold the target for this process.

    Raises
    ------
    ResultError
        Another run is writing there, or the place cannot be written.
    """
    from filelock import FileLock, Timeout

    lock = FileLock(beside(target, ".lock"), timeout=0)
    try:
        with lock:
            _restore_interrupted_swap(target)
            yield
    except Timeout:
        raise ResultError(
            "another run is writing here", where=str(target), hint="wait for it, or give another folder"
        ) from None
    except PermissionError as denied:
        raise ResultError(f"cannot write: {denied.strerror}", where=str(denied.filename or target)) from denied
    if not lock.is_locked:
        beside(target, ".lock").unlink(missing_ok=True)


def open_store(target: Path, identity: Identity) -> tuple[FolderStore, str]:
    """The store of a run, with the answers that an unfinished or an earlier run left, where they serve.

    Returns
    -------
    store, note : what was found, in plain words; empty when there was nothing
    """
    unfinished, mask = beside(target, ".unfinished"), beside(target, ".unfinished") / MASK
    earlier = read_identity(target / MASK)
    note = ""
    started = read_identity(mask)
    if started != identity and unfinished.exists():
        if started is not None:
            note = f"an unfinished run does not serve: {_changes(started, identity)} changed"
        shutil.rmtree(unfinished)
    elif started == identity:
        note = "going on with an unfinished run"
    if not note and earlier is not None and earlier != identity:
        note = f"casting anew: {_changes(earlier, identity)} changed"
    write_json_aside(mask / "identity.json", identity_content(identity))
    return FolderStore(mask, earlier=target / MASK if earlier == identity else None), note


def finish(target: Path) -> None:
    """Put the finished folder in the target's place, the answers of the earlier one kept where they serve."""
    unfinished, before = beside(target, ".unfinished"), beside(target, ".replaced")
    keep = target.is_dir() and read_identity(target / MASK) == read_identity(unfinished / MASK)
    if before.exists():
        shutil.rmtree(before)
    if target.is_dir():
        os.replace(target, before)
    os.replace(unfinished, target)
    if keep:
        _move_missing_answers(before / MASK, target / MASK)
    if before.exists():
        shutil.rmtree(before)


def _restore_interrupted_swap(target: Path) -> None:
    """A run that was killed between the two renames left the earlier result beside its place."""
    before = beside(target, ".replaced")
    if before.is_dir() and not target.exists():
        os.replace(before, target)


def _move_missing_answers(source: Path, goal: Path) -> None:
    for chunk in sorted(source.glob("*/*")):
        moved = goal / chunk.parent.name / chunk.name
        if not moved.exists():
            moved.parent.mkdir(exist_ok=True)
            os.replace(chunk, moved)


def _changes(before: Identity, now: Identity) -> str:
    return " and ".join(before.differences(now))
