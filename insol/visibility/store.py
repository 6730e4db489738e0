"""Where answers are kept: a folder of plain npz files that any numpy can read, or memory.

    mask/
      identity.json           what the answers belong to: fingerprints of geometry, receptors, site
      <question>/0000.npz     the answers of one chunk of receptors
      <question>/whole.json   written last: the question is answered for every chunk

A chunk is written aside and renamed, so a file that is there is whole. Whatever happens to the
process, the next run goes on after the last whole chunk. Bits are deflated at the fastest level:
their runs shrink to a tenth or less, at several times the speed of casting. Begins and ends of
spells would hardly shrink, and are stored as they are.
"""

from __future__ import annotations

import io
import json
import os
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from insol.errors import ResultError

ZIP_EPOCH = (1980, 1, 1, 0, 0, 0)
"""The date of all entries: the same answers are the same bytes."""

Arrays = dict[str, NDArray]


class Store(Protocol):
    """Answers by question and chunk."""

    def has(self, question: str, chunk: int) -> bool: ...

    def read(self, question: str, chunk: int) -> Arrays: ...

    def write(self, question: str, chunk: int, arrays: Arrays) -> None: ...

    def close_question(self, question: str, facts: Mapping[str, object]) -> None:
        """Say that a question is answered for every chunk."""
        ...


class MemoryStore:
    """Answers kept for as long as the run lasts."""

    def __init__(self) -> None:
        self._answers: dict[tuple[str, int], Arrays] = {}

    def has(self, question: str, chunk: int) -> bool:
        return (question, chunk) in self._answers

    def read(self, question: str, chunk: int) -> Arrays:
        return self._answers[question, chunk]

    def write(self, question: str, chunk: int, arrays: Arrays) -> None:
        self._answers[question, chunk] = arrays

    def close_question(self, question: str, facts: Mapping[str, object]) -> None:
        pass


class FolderStore:
    """Answers kept in `folder`; chunks already whole in `earlier` folders are taken from there."""

    def __init__(self, folder: Path, *, earlier: Path | None = None) -> None:
        self.folder = folder
        self._earlier = earlier

    def has(self, question: str, chunk: int) -> bool:
        return self._found(question, chunk) is not None

    def read(self, question: str, chunk: int) -> Arrays:
        path = self._found(question, chunk)
        if path is None:
            raise ResultError(f"chunk {chunk} of {question} is missing", where=str(self.folder))
        try:
            with np.load(path, allow_pickle=False) as arrays:
                return {name: arrays[name] for name in arrays.files}
        except (OSError, ValueError, zipfile.BadZipFile, EOFError, KeyError) as damage:
            raise ResultError(
                f"a stored answer cannot be read: {damage}", where=str(path), hint="delete this file and run again"
            ) from damage

    def write(self, question: str, chunk: int, arrays: Arrays) -> None:
        path = self._path(self.folder, question, chunk)
        path.parent.mkdir(parents=True, exist_ok=True)
        aside = path.with_suffix(".writing")
        with zipfile.ZipFile(aside, "w") as archive:
            for name, array in arrays.items():
                entry = zipfile.ZipInfo(f"{name}.npy", date_time=ZIP_EPOCH)
                entry.compress_type = zipfile.ZIP_DEFLATED if array.dtype == np.uint8 else zipfile.ZIP_STORED
                plain = io.BytesIO()
                np.lib.format.write_array(plain, np.ascontiguousarray(array), allow_pickle=False)
                archive.writestr(entry, plain.getbuffer(), compresslevel=1)
        os.replace(aside, path)

    def close_question(self, question: str, facts: Mapping[str, object]) -> None:
        write_json_aside(self.folder / question / "whole.json", facts)

    def _found(self, question: str, chunk: int) -> Path | None:
        for folder in (self.folder, self._earlier):
            if folder is not None and self._path(folder, question, chunk).is_file():
                return self._path(folder, question, chunk)
        return None

    @staticmethod
    def _path(folder: Path, question: str, chunk: int) -> Path:
        return folder / question / f"{chunk:04d}.npz"


def write_json_aside(path: Path, content: Mapping[str, object]) -> None:
    """Write JSON so that the file is either the old one or the whole new one."""
    path.parent.mkdir(parents=True, exist_ok=True)
    aside = path.with_name(path.name + ".writing")
    aside.write_text(json.dumps(content, indent=1, ensure_ascii=False, default=str) + "\n", encoding="utf-8")
    os.replace(aside, path)
