"""The result folder: an earlier result is whole at every moment, one writer at a time."""

from __future__ import annotations

from pathlib import Path

import pytest

from insol.errors import ResultError
from insol.output.result_folder import beside, check_target, finish, only_writer, open_store
from insol.visibility.identity import Identity

IDENTITY = Identity(geometry="a", receptors="b", site="c", casting="embree")
OTHER = Identity(geometry="z", receptors="b", site="c", casting="embree")


def a_result(target: Path, identity: Identity, question: str) -> None:
    """Write a small result the way a run does."""
    with only_writer(target):
        store, _ = open_store(target, identity)
        if not store.has(question, 0):
            store.write(question, 0, {})
        (beside(target, ".unfinished") / "result.json").write_text(question)
        finish(target)


def test_a_result_takes_the_place_of_the_earlier_one(tmp_path: Path) -> None:
    target = tmp_path / "result"
    a_result(target, IDENTITY, "day-a")
    a_result(target, OTHER, "day-b")
    assert (target / "result.json").read_text() == "day-b"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["result"]
    assert not (target / "mask" / "day-a").exists()


def test_answers_of_the_same_identity_are_kept(tmp_path: Path) -> None:
    target = tmp_path / "result"
    a_result(target, IDENTITY, "day-a")
    a_result(target, IDENTITY, "day-b")
    assert (target / "mask" / "day-a" / "0000.npz").is_file()
    assert (target / "mask" / "day-b" / "0000.npz").is_file()


def test_an_unfinished_run_is_gone_on_with(tmp_path: Path) -> None:
    target = tmp_path / "result"
    with only_writer(target):
        store, note = open_store(target, IDENTITY)
        assert note == ""
        store.write("day-a", 0, {})
    with only_writer(target):
        store, note = open_store(target, IDENTITY)
        assert store.has("day-a", 0)
        assert note == "going on with an unfinished run"
    with only_writer(target):
        store, note = open_store(target, OTHER)
        assert not store.has("day-a", 0)
        assert note == "an unfinished run does not serve: the models' geometry changed"


def test_a_kill_between_the_two_renames_loses_nothing(tmp_path: Path) -> None:
    target = tmp_path / "result"
    a_result(target, IDENTITY, "day-a")
    target.rename(beside(target, ".replaced"))
    with only_writer(target):
        assert (target / "result.json").read_text() == "day-a"


def test_a_second_writer_is_told(tmp_path: Path) -> None:
    target = tmp_path / "result"
    with only_writer(target), pytest.raises(ResultError, match="another run is writing here"), only_writer(target):
        pass


def test_a_folder_of_other_things_is_refused(tmp_path: Path) -> None:
    (tmp_path / "thesis.doc").write_text("years of work")
    with pytest.raises(ResultError, match="not empty and holds no result"):
        check_target(tmp_path)
    with pytest.raises(ResultError, match="a file, not a folder"):
        check_target(tmp_path / "thesis.doc")
    with pytest.raises(ResultError, match="does not exist"):
        check_target(tmp_path / "nowhere" / "result")
    check_target(tmp_path / "new")


def test_files_that_are_not_ours_stay(tmp_path: Path) -> None:
    """A picture and notes that a person put into the result folder outlive the next run."""
    target = tmp_path / "result"
    a_result(target, IDENTITY, "day-a")
    (target / "notes.txt").write_text("mine")
    (target / "pictures").mkdir()
    (target / "pictures" / "view.png").write_text("a picture")
    a_result(target, OTHER, "day-b")
    assert (target / "notes.txt").read_text() == "mine"
    assert (target / "pictures" / "view.png").read_text() == "a picture"
    assert (target / "result.json").read_text() == "day-b"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["result"]


@pytest.mark.parametrize("ending", [".unfinished", ".replaced"])
def test_a_folder_beside_that_is_not_ours_is_refused_untouched(tmp_path: Path, ending: str) -> None:
    target = tmp_path / "result"
    a_result(target, IDENTITY, "day-a")
    beside(target, ending).mkdir()
    (beside(target, ending) / "mine.txt").write_text("mine")
    with pytest.raises(ResultError, match=r'"mine.txt" is not of this program'):
        check_target(target)
    assert (beside(target, ending) / "mine.txt").read_text() == "mine"
