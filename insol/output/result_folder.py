"""The result folder: written aside, renamed when whole, one writer at a time.

DIR.unfinished/   grows while a run goes on; a stopped run goes on from there
DIR.replaced/     the earlier result while the new one takes its place
DIR.lock          there while a run goes on
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
OURS = frozenset({MASK, RESULT, "faces.csv", "parts.csv", "spells.csv", "faces.ply", "context.ply"})
"""What this program writes into a folder. Nothing else is ever deleted: pictures and notes are people's own."""


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
    for aside in (beside(target, ".unfinished"), beside(target, ".replaced")):
        strangers = _strangers(aside)
        if strangers and (aside.name.endswith(".unfinished") or target.exists()):
            raise ResultError(
                f'"{strangers[0].name}" is not of this program, which needs this folder for itself',
                where=str(aside),
                hint="move it away, or give another name for the result",
            )


def _strangers(folder: Path) -> list[Path]:
    """What lies in a folder and was not written by this program."""
    if not folder.is_dir():
        return [folder] if folder.exists() or folder.is_symlink() else []
    return sorted(path for path in folder.iterdir() if path.name.removesuffix(".writing") not in OURS)


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
            try:
                _restore_interrupted_swap(target)
                yield
            finally:
                if os.name == "posix":  # while it is held: no one else's lock can be taken away
                    beside(target, ".lock").unlink(missing_ok=True)
    except Timeout:
        raise ResultError(
            "another run is writing here", where=str(target), hint="wait for it, or give another folder"
        ) from None
    except PermissionError as denied:
        raise ResultError(f"cannot write: {denied.strerror}", where=str(denied.filename or target)) from denied


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
        _delete_ours(unfinished)
    elif started == identity:
        note = "going on with an unfinished run"
    if not note and earlier is not None and earlier != identity:
        note = f"casting anew: {_changes(earlier, identity)} changed"
    write_json_aside(mask / "identity.json", identity_content(identity))
    return FolderStore(mask, earlier=target / MASK if earlier == identity else None), note


def finish(target: Path) -> None:
    """Put the finished folder in the target's place.

    Answers of the earlier one are kept where they serve, and files that are not ours in any case.
    """
    unfinished, before = beside(target, ".unfinished"), beside(target, ".replaced")
    keep = target.is_dir() and read_identity(target / MASK) == read_identity(unfinished / MASK)
    _delete_ours(before)
    if target.is_dir():
        os.replace(target, before)
    os.replace(unfinished, target)
    if before.is_dir():
        for stranger in _strangers(before):
            os.replace(stranger, target / stranger.name)
    if keep:
        _move_missing_answers(before / MASK, target / MASK)
    _delete_ours(before)


def _delete_ours(folder: Path) -> None:
    """Delete what this program wrote, and the folder once nothing else is in it."""
    if not folder.is_dir():
        return
    strangers = set(_strangers(folder))
    for path in set(folder.iterdir()) - strangers:
        if path.is_dir() and not path.is_symlink():
            shutil.rmtree(path)
        else:
            path.unlink()
    if not strangers:
        folder.rmdir()


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
