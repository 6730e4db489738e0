"""Answers do not depend on threads or chunks, are not asked twice, and survive a kill."""

from __future__ import annotations

import signal
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from builders import box, make_study, pole

import insol
from insol.errors import ResultError
from insol.study.description import FacesMeasure, GroundMeasure, Period, Site, Study
from insol.visibility.answering import answer_all, chunk_size, chunks_of
from insol.visibility.store import MemoryStore

SITE = Site(latitude=47.0, longitude=8.0, time_zone="Europe/Zurich")
DAY = Period(name="day", days="03-21", year=2025)
YEAR = Period(name="year", days="year", year=2025)
HOURS = Period(name="hours", days="05-01/05-31", year=2025, step_min=60, sampling="steps")


def study(folder: Path, *periods: Period, spacing_m: float = 1.0) -> Study:
    parts = {"tower": box(0, 0, 0, 10, 10, 30), "low": box(14, -2, 0, 30, 12, 6), "mast": pole(-4, -6, 15, 0.3)}
    return make_study(
        folder, parts,
        [
            FacesMeasure(name="walls", parts=("tower", "low"), spacing_m=spacing_m),
            GroundMeasure(name="yard", polygon=((-20, -20), (40, -20), (40, 30), (-20, 30)), spacing_m=spacing_m),
        ],
        periods, SITE,
    )  # fmt: skip


def mask_bytes(folder: Path) -> dict[str, bytes]:
    mask = folder / "mask"
    return {str(path.relative_to(mask)): path.read_bytes() for path in sorted(mask.rglob("*.npz"))}


@pytest.mark.parametrize("count", [0, 1, 511, 512, 5000, 200_000])
def test_chunks_cover_all_receptors_once(count: int) -> None:
    size = chunk_size(count)
    assert size % 8 == 0
    covered = np.concatenate([np.arange(run.start, run.stop) for _, run in chunks_of(count, size)])
    np.testing.assert_array_equal(covered, np.arange(count))


def test_one_thread_and_four_give_the_same_bytes(tmp_path: Path) -> None:
    asked = study(tmp_path, DAY, YEAR, HOURS, spacing_m=2.0)
    insol.run(asked, out=tmp_path / "one", threads=1)
    insol.run(asked, out=tmp_path / "four", threads=4)
    assert mask_bytes(tmp_path / "one") == mask_bytes(tmp_path / "four")
    assert (tmp_path / "one" / "faces.csv").read_bytes() == (tmp_path / "four" / "faces.csv").read_bytes()


def test_what_is_stored_is_not_asked_again(tmp_path: Path) -> None:
    """Windows, clocks, low-sun limits, other days of a year: arithmetic on what is there."""
    insol.run(study(tmp_path, DAY, YEAR, spacing_m=3.0), out=tmp_path / "result")
    others = [
        replace(DAY, name="window", start="09:00", end="15:00"),
        replace(DAY, name="solar", clock="solar", start="10:00", end="14:00"),
        replace(DAY, name="high", lowest_altitude_deg=10.0),
        replace(YEAR, name="winter", days="10-01/03-31", lowest_altitude_deg=5.0),
        replace(YEAR, name="later", year=2031),
    ]
    again = insol.run(study(tmp_path, *others, spacing_m=3.0), out=tmp_path / "result")
    assert again.tally.asked == 0
    fresh = insol.run(study(tmp_path, *others, spacing_m=3.0))
    for stored, asked in zip(again.periods, fresh.periods, strict=True):
        np.testing.assert_array_equal(stored.direct_h, asked.direct_h)


def test_a_model_saved_again_is_not_asked_again_and_a_changed_one_is(tmp_path: Path) -> None:
    asked = study(tmp_path, DAY, spacing_m=3.0)
    insol.run(asked, out=tmp_path / "result")
    model = tmp_path / "model.obj"
    model.write_text("# saved again\n" + model.read_text())
    assert insol.run(asked, out=tmp_path / "result").tally.asked == 0
    model.write_text(model.read_text().replace("30.0", "31.0"))
    changed = insol.run(asked, out=tmp_path / "result")
    assert changed.tally.found == 0
    assert any("the models' geometry" in warning and "changed" in warning for warning in changed.warnings)


SLOWLY = """
import sys, time
from insol.casting.embree import EmbreeCaster
from insol.casting.plain import NumpyCaster
for caster in (EmbreeCaster, NumpyCaster):
    def slow(self, *rays, plain=caster.blocked):
        time.sleep(0.003)
        return plain(self, *rays)
    caster.blocked = slow
from insol.cli.main import main
sys.exit(main())
"""


def start_slow_run(folder: Path, target: Path) -> subprocess.Popen[str]:
    """The command itself, each cast delayed, so that there is time to end it."""
    from insol.study.writing import study_text

    file = folder / "study.toml"
    file.write_text(study_text(study(folder, HOURS, YEAR)), encoding="utf-8")
    return subprocess.Popen(
        [sys.executable, "-c", SLOWLY, "run", str(file), "--out", str(target)],
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
    )  # fmt: skip


def wait_for_chunks(folder: Path, count: int) -> None:
    for _ in range(600):
        if len(list(folder.rglob("*.npz"))) >= count:
            return
        time.sleep(0.05)
    pytest.fail("no chunk was written within half a minute")


@pytest.mark.skipif(sys.platform == "win32", reason="there are no such signals on Windows")
@pytest.mark.parametrize("end", ["SIGKILL", "SIGINT"])
def test_a_run_ended_midway_goes_on_and_ends_with_the_same_bytes(tmp_path: Path, end: str) -> None:
    target, unfinished = tmp_path / "result", tmp_path / "result.unfinished"
    process = start_slow_run(tmp_path, target)
    wait_for_chunks(unfinished, 3)
    begun = time.perf_counter()
    process.send_signal(getattr(signal, end))
    _, errors = process.communicate(timeout=30)
    if end == "SIGINT":
        assert process.returncode == 130
        assert time.perf_counter() - begun < 5  # within a second on an idle machine; tests share theirs
        assert "stopped" in errors
        assert "Traceback" not in errors
    assert not target.exists()
    kept = len(list(unfinished.rglob("*.npz")))
    assert kept >= 3
    asked = insol.load_study(tmp_path / "study.toml")
    resumed = insol.run(asked, out=target)
    assert resumed.tally.found == kept
    insol.run(asked, out=tmp_path / "whole")
    assert mask_bytes(target) == mask_bytes(tmp_path / "whole")
    assert (target / "faces.csv").read_bytes() == (tmp_path / "whole" / "faces.csv").read_bytes()


@pytest.mark.skipif(sys.platform == "win32", reason="a lock is told apart there in another way")
def test_a_second_run_into_the_same_folder_is_told(tmp_path: Path) -> None:
    target = tmp_path / "result"
    process = start_slow_run(tmp_path, target)
    try:
        wait_for_chunks(tmp_path / "result.unfinished", 1)
        with pytest.raises(ResultError, match="another run is writing here"):
            insol.run(study(tmp_path, DAY), out=target)
    finally:
        process.kill()
        process.communicate()


def test_a_failing_worker_stops_the_run_and_is_named(tmp_path: Path) -> None:
    from insol.pipeline import prepare

    prepared = prepare(study(tmp_path, DAY))

    class Failing:
        engine, triangle_count = "failing", 1

        def blocked(self, *_: object) -> object:
            raise RuntimeError("a ray was lost")

    with pytest.raises(RuntimeError, match="a ray was lost"):
        answer_all(prepared.plans[0].questions, Failing(), prepared.receptors, MemoryStore())  # type: ignore[arg-type]


def test_a_result_of_nothing_but_covered_faces_is_empty_and_said(tmp_path: Path) -> None:
    """A wall between two blocks that stand against each other: no number, no fault."""
    parts = {"left": box(0, 0, 0, 10, 10, 10), "right": box(10, 0, 0, 20, 10, 10)}
    inside = GroundMeasure(name="under", polygon=((1, 1), (9, 1), (9, 9), (1, 9)), spacing_m=2.0)
    results = insol.run(make_study(tmp_path, parts, [inside], [DAY, YEAR], SITE), out=tmp_path / "result")
    assert np.isnan(results.periods[0].direct_h).all()
    assert np.isnan(results.periods[1].direct_h).all()
    assert (tmp_path / "result" / "faces.csv").read_text().count("covered") == len(results.faces)


@pytest.mark.skipif(sys.platform == "win32", reason="links need rights there")
def test_a_result_behind_a_link_is_replaced_behind_it(tmp_path: Path) -> None:
    (tmp_path / "real").mkdir()
    (tmp_path / "link").symlink_to(tmp_path / "real")
    for _ in range(2):
        insol.run(study(tmp_path, DAY, spacing_m=5.0), out=tmp_path / "link")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "real" / "result.json").is_file()
    assert not [*tmp_path.glob("*.lock"), *tmp_path.glob("*.replaced")]
