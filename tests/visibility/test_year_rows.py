"""The year along its rows against the same rows cast plainly, and against every day of the year."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from small_towns import SmallTown, small_town

from insol.measures.by_days import Spells, hours_by_day, spans_of
from insol.measures.by_year import GATHERED_SHARE, YearWeights, hours_by_year
from insol.measures.sun_hours import SunHours
from insol.study.description import Period
from insol.sun.times import Intervals, intervals_of
from insol.visibility.lattice import row_declinations, rows_over
from insol.visibility.plan import day_questions
from insol.visibility.tracing import samples_between, spells_of, trace
from insol.visibility.year import YearQuestion

YEAR = Period(name="year", days="year", year=2025)
KINDS = ("blocks", "columns", "slits", "slats")
PLAIN_STEP_S = 60.0


def nothing() -> None:
    """No one stops these."""


@pytest.fixture(scope="module", params=KINDS)
def town(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> SmallTown:
    kind = str(request.param)
    return small_town(tmp_path_factory.mktemp(kind), kind, KINDS.index(kind), YEAR)


def year_question(town: SmallTown, **settings: float) -> YearQuestion:
    site = town.prepared.study.site
    return replace(YearQuestion(site.latitude, site.north_deg), **settings)


def hours_along_rows(town: SmallTown, question: YearQuestion, intervals: Intervals) -> SunHours:
    answer = question.answer(town.prepared.caster, town.receptors, nothing)
    return hours_by_year(YearWeights(question, intervals, town.prepared.track), town.receptors, answer)


WINDOWS = {
    "year": YEAR,
    "noon": replace(YEAR, start="12:00", end="13:00", clock="standard"),
    "eight mornings": replace(YEAR, days="05-03/05-10", start="09:00", end="10:00", clock="standard"),
}


def hours_day_by_day(town: SmallTown) -> dict[str, np.ndarray]:
    """Hours (n,) of each window, days sampled each two minutes and every edge found to a second: the truth."""
    prepared, receptors = town.prepared, town.receptors
    site, track = prepared.study.site, prepared.track
    spans = {name: spans_of(intervals_of(period, site, track)) for name, period in WINDOWS.items()}
    hours = {name: np.zeros(len(receptors)) for name in WINDOWS}
    for day in day_questions(YEAR, site, track):
        question = replace(day, step_s=120.0)
        answer = question.answer(prepared.caster, receptors, nothing)
        spells = Spells(answer["receptor"], answer["begin"], answer["end"])
        for name, of_window in spans.items():
            on_day = of_window[(of_window[:, 1] > day.rise) & (of_window[:, 0] < day.set)]
            hours[name] += hours_by_day(question, on_day, receptors, spells)[0].direct_h
    return hours


def test_the_stated_error_holds(town: SmallTown) -> None:
    """For at least 95 of 100 receptors the days themselves lie within the error that the rows state, windows too."""
    truth, prepared = hours_day_by_day(town), town.prepared
    for name, period in WINDOWS.items():
        intervals = intervals_of(period, prepared.study.site, prepared.track)
        found = hours_along_rows(town, year_question(town), intervals)
        assert np.mean(np.abs(found.direct_h - truth[name]) <= found.error_h + 1e-6) >= 0.95, name
        if name == "year":  # an error that promised nothing would hold too: it is small beside what it belongs to
            assert np.median(found.error_h) < 0.04 * np.median(found.possible_h)


def test_the_rows_agree_with_the_same_rows_cast_plainly(town: SmallTown) -> None:
    """Every row of the finest lattice traced whole, none interpolated, no sample taken for known."""
    intervals = town.prepared.plans[0].intervals
    quick = hours_along_rows(town, year_question(town), intervals)
    plain = hours_along_rows(town, year_question(town, coarse=64, levels=0, step_s=200.0), intervals)
    off = np.abs(quick.direct_h - plain.direct_h)
    assert np.mean(off <= quick.error_h + plain.error_h) >= 0.95
    assert np.median(off) <= np.median(quick.error_h)


def test_rows_between_have_the_spells_of_the_plain_path(tmp_path: Path) -> None:
    """Among blocks, without thin features, a row traced with a guess has as many spells as one traced without."""
    town = small_town(tmp_path, "blocks", 0, YEAR)
    question = year_question(town, smooth_s=-1.0)  # nothing is interpolated: every row between is traced
    answer = question.answer(town.prepared.caster, town.receptors, nothing)
    differing = 0
    for number, row in enumerate(question.rows()):
        samples = samples_between(row.rise, row.set, PLAIN_STEP_S)
        receptor, _, _ = spells_of(trace(town.prepared.caster, town.receptors, row, samples, question.width_s, nothing))
        plain = np.bincount(receptor, minlength=len(town.receptors))
        differing += int((answer["count"][number] != plain).sum())
    # What differs are spells shorter than the step, at the corners of blocks.
    assert differing <= 0.06 * answer["count"].size


def test_any_chunk_of_receptors_has_the_same_answer(town: SmallTown) -> None:
    question = year_question(town)
    whole = question.answer(town.prepared.caster, town.receptors, nothing)
    cuts = [0, 7, 40, len(town.receptors)]
    pieces = [
        question.answer(town.prepared.caster, town.receptors.piece(first, last), nothing)
        for first, last in pairwise(cuts)
    ]
    np.testing.assert_array_equal(np.concatenate([piece["count"] for piece in pieces], axis=1), whole["count"])
    owner = np.tile(np.arange(len(town.receptors)), len(whole["count"])).repeat(whole["count"].ravel())
    for piece, first, last in zip(pieces, cuts[:-1], cuts[1:], strict=True):
        mine = (owner >= first) & (owner < last)
        for side in ("begin", "end"):
            np.testing.assert_array_equal(piece[side], whole[side][mine])


def test_many_orientations_are_weighed_alike(town: SmallTown, monkeypatch: pytest.MonkeyPatch) -> None:
    question = year_question(town)
    answer = question.answer(town.prepared.caster, town.receptors, nothing)
    weights = YearWeights(question, town.prepared.plans[0].intervals, town.prepared.track)
    together = hours_by_year(weights, town.receptors, answer)
    monkeypatch.setattr("insol.measures.by_year.MOST_TABLES", 3)
    apart = hours_by_year(weights, town.receptors, answer)
    np.testing.assert_allclose(apart.direct_h, together.direct_h, rtol=0, atol=1e-9)
    np.testing.assert_allclose(apart.possible_h, together.possible_h, rtol=0, atol=1e-9)


def test_gathered_pieces_stay_within_what_is_stated_for_them(town: SmallTown) -> None:
    question = year_question(town)
    answer = question.answer(town.prepared.caster, town.receptors, nothing)
    intervals, track = town.prepared.plans[0].intervals, town.prepared.track
    exact = hours_by_year(YearWeights(question, intervals, track), town.receptors, answer)
    found = hours_by_year(YearWeights(question, intervals, track, many=True), town.receptors, answer)
    assert (np.abs(found.possible_h - exact.possible_h) <= GATHERED_SHARE * exact.possible_h + 0.5).all()
    assert (np.abs(found.direct_h - exact.direct_h) <= found.error_h).all()


def test_periods_of_the_year_add_up_to_it(town: SmallTown) -> None:
    """Months and halves of the day are weights on one answer: nothing is cast for them, and their sum is the year."""
    prepared, question = town.prepared, year_question(town)
    answer = question.answer(prepared.caster, town.receptors, nothing)

    def hours(days: str, start: str, end: str) -> np.ndarray:
        period = replace(YEAR, days=days, start=start, end=end, clock="standard")
        intervals = intervals_of(period, prepared.study.site, prepared.track)
        return hours_by_year(YearWeights(question, intervals, prepared.track), town.receptors, answer).direct_h

    spans = ("01-01/03-31", "04-01/06-30", "07-01/12-31")
    parts = [hours(span, *window) for span in spans for window in (("00:00", "12:00"), ("12:00", "24:00"))]
    whole = hours("year", "00:00", "24:00")
    np.testing.assert_allclose(np.sum(parts, axis=0), whole, rtol=0, atol=0.02)  # [h] pieces of a minute are cut


def test_rows_are_even_in_time_and_hold_the_sun() -> None:
    declinations = row_declinations(64)
    assert declinations[0] == -declinations[-1] == pytest.approx(-23.45)
    assert np.all(np.diff(declinations) > 0)
    # Common practice, no source: the sun passes the equator's declinations fastest, and lingers at the solstices.
    assert np.diff(declinations)[32] > 20 * np.diff(declinations)[0]


@pytest.mark.parametrize(("latitude", "longest_h"), [(0.0, 12.0), (52.0, 16.50), (70.0, 24.0)])
def test_the_length_of_the_longest_row(latitude: float, longest_h: float) -> None:
    """2/15 arccos(-tan φ tan δ) hours (Duffie and Beckman, Solar Engineering of Thermal Processes, eq. 1.6.11)."""
    row = rows_over(latitude, 0.0, 8)[-1]
    assert (row.set - row.rise) / 3600 == pytest.approx(longest_h, abs=0.02)


def test_a_polar_site_has_rows_without_sun(tmp_path: Path) -> None:
    town = small_town(tmp_path, "blocks", 0, YEAR, count=30)
    question = YearQuestion(78.0, 0.0)
    answer = question.answer(town.prepared.caster, town.receptors, nothing)
    night = [number for number, row in enumerate(question.rows()) if row.set == 0]
    assert night
    assert not answer["count"][night].any()


def test_no_receptors_no_spells(town: SmallTown) -> None:
    empty = town.receptors.piece(0, 0)
    answer = year_question(town).answer(town.prepared.caster, empty, nothing)
    assert len(answer["begin"]) == len(answer["end"]) == 0
