"""Stored answers: whole or not there, the same when read again, taken from an earlier folder."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from insol.errors import ResultError
from insol.visibility.identity import Identity, fingerprint, read_identity
from insol.visibility.store import FolderStore, MemoryStore, write_json_aside


def arrays() -> dict[str, np.ndarray]:
    return {"open": np.arange(24, dtype=np.uint8).reshape(3, 8), "begin": np.array([1.5, 2.25])}


@pytest.mark.parametrize("kind", ["memory", "folder"])
def test_what_is_written_is_read_back(kind: str, tmp_path: Path) -> None:
    store = MemoryStore() if kind == "memory" else FolderStore(tmp_path / "mask")
    assert not store.has("day-a", 0)
    store.write("day-a", 0, arrays())
    assert store.has("day-a", 0)
    assert not store.has("day-a", 1)
    for name, array in arrays().items():
        np.testing.assert_array_equal(store.read("day-a", 0)[name], array, strict=True)


def test_a_chunk_is_plain_npz(tmp_path: Path) -> None:
    FolderStore(tmp_path).write("day-a", 3, arrays())
    with np.load(tmp_path / "day-a" / "0003.npz") as stored:
        assert sorted(stored.files) == ["begin", "open"]


def test_a_half_written_chunk_is_not_there(tmp_path: Path) -> None:
    (tmp_path / "day-a").mkdir()
    (tmp_path / "day-a" / "0000.writing").write_bytes(b"PK half")
    assert not FolderStore(tmp_path).has("day-a", 0)


def test_an_earlier_folder_lends_its_answers(tmp_path: Path) -> None:
    FolderStore(tmp_path / "earlier").write("day-a", 0, arrays())
    store = FolderStore(tmp_path / "now", earlier=tmp_path / "earlier")
    assert store.has("day-a", 0)
    np.testing.assert_array_equal(store.read("day-a", 0)["open"], arrays()["open"])
    store.write("day-a", 0, {"open": np.ones(3)})
    np.testing.assert_array_equal(store.read("day-a", 0)["open"], np.ones(3))


def test_a_damaged_chunk_is_said_in_one_line(tmp_path: Path) -> None:
    store = FolderStore(tmp_path)
    store.write("day-a", 0, arrays())
    (tmp_path / "day-a" / "0000.npz").write_bytes(b"not a zip file at all")
    with pytest.raises(ResultError, match=r"cannot be read.*delete this file and run again"):
        store.read("day-a", 0)


def test_identity_names_what_changed() -> None:
    one = Identity(geometry="a", receptors="b", site="c", casting="embree")
    other = Identity(geometry="x", receptors="b", site="y", casting="embree")
    assert one.differences(other) == ["the models' geometry", "the site"]
    assert one.differences(one) == []


def test_identity_is_read_back_or_none(tmp_path: Path) -> None:
    one = Identity(geometry="a", receptors="b", site="c", casting="embree")
    assert read_identity(tmp_path) is None
    write_json_aside(tmp_path / "identity.json", {**one.__dict__})
    assert read_identity(tmp_path) == one
    (tmp_path / "identity.json").write_text("{]")
    assert read_identity(tmp_path) is None


def test_fingerprints_see_values_shapes_and_types() -> None:
    values = np.arange(6, dtype=np.float64)
    assert fingerprint(values) == fingerprint(values.copy())
    different = [values.reshape(2, 3), values.astype(np.float32), values + 1e-12]
    assert len({fingerprint(array) for array in [values, *different]}) == 4
