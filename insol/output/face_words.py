"""What is to be said of one face, in words."""

from __future__ import annotations

import math
from dataclasses import dataclass

from insol.errors import printable
from insol.output.view_data import CLOCKS, ViewData, shortened

MOST_SPELLS = 6
LONG_H = 100.0
"""From so many hours on a period is told in whole ones."""

LONGEST_NAME = 60
COMPASS = "north north-east east south-east south south-west west north-west".split()


@dataclass(frozen=True)
class FaceWords:
    """A face's name, and what is said of it: pairs of label and words."""

    heading: str
    rows: tuple[tuple[str, str], ...]

    @property
    def text(self) -> str:
        """All of it, a line each."""
        return "\n".join([self.heading, *(f"{label}: {words}" if label else words for label, words in self.rows)])


def words_of_face(data: ViewData, row: int, period: str) -> FaceWords:
    """A face's part and place, and what it has in a period."""
    face = data.faces.iloc[row]
    part, name = _name(face["part"]), _name(face["name"])
    heading = f"{part or face['measure']}, {name or 'face ' + str(int(face['face']))}"
    area = f"{face['area_m2']:.2f} m²" if face["area_m2"] > 0 else "a point"
    rows = [
        ("facing", facing(float(face["azimuth_deg"]), float(face["tilt_deg"]))),
        ("size", f"{area}, at z = {face['z_m']:,.1f} m"),
    ]
    if face["status"] == "covered":
        return FaceWords(heading, (*rows, ("covered", "it lies against or inside another body")))
    direct, possible, error = (face[f"{period}_{column}"] for column in ("direct_h", "possible_h", "error_h"))
    whole = bool(possible >= LONG_H)
    rows += [
        ("direct sun", f"{hours(direct, whole=whole)} ± {hours(error, whole=whole)}"),
        ("possible", hours(possible, whole=whole)),
    ]
    fraction = face[f"{period}_shaded_fraction"]
    if not math.isnan(fraction):
        rows.append(("shaded fraction", f"{fraction:.2f}"))
    return FaceWords(heading, (*rows, *spell_rows(data, row, period)))


def spell_rows(data: ViewData, row: int, period: str) -> list[tuple[str, str]]:
    """The face's spells of sun, where the period is a day."""
    face, table = data.faces.iloc[row], data.spells
    same = (table["period"] == period) & (table["measure"] == face["measure"]) & (table["face"] == face["face"])
    same &= (table["part"] == face["part"]) if isinstance(face["part"], str) else table["part"].isna()
    found = table[same]
    spells = [f"{begin} to {end}" for begin, end in zip(found["begin"], found["end"], strict=True)]
    if len(spells) > MOST_SPELLS:
        spells = [*spells[: MOST_SPELLS - 1], f"and {len(spells) - MOST_SPELLS + 1} spells more"]
    if spells:
        spells[0] += f" {CLOCKS.get(str(data.period(period).get('clock')), '')}".rstrip()
    return [("sun" if number == 0 else "", spell) for number, spell in enumerate(spells)]


def facing(azimuth_deg: float, tilt_deg: float) -> str:
    """Which way a face looks.

    >>> facing(204.0, 90.0), facing(float("nan"), 0.0), facing(350.0, 30.0)
    ('204° (south-west), upright', 'up', '350° (north), tilted 30°')
    """
    if math.isnan(azimuth_deg):
        return "up" if tilt_deg < 90 else "down"
    point = COMPASS[round(azimuth_deg / 45) % 8]
    lie = "upright" if abs(tilt_deg - 90) < 0.5 else f"tilted {tilt_deg:.0f}°"
    return f"{azimuth_deg:.0f}° ({point}), {lie}"


def hours(value: float, *, whole: bool = False) -> str:
    """Hours to read: hours and minutes, or whole hours of a long period.

    >>> hours(5.5), hours(1234.4), hours(0.02), hours(30.6, whole=True)
    ('5 h 30 min', '1,234 h', '1 min', '31 h')
    """
    if math.isnan(value):
        return "unknown"
    if value >= LONG_H or whole:
        return f"{value:,.0f} h"
    minutes = round(value * 60)
    if minutes < 60:
        return f"{minutes} min"
    return f"{minutes // 60} h {minutes % 60:02d} min"


def _name(value: object) -> str:
    """A name in one line; empty where the table has none."""
    return shortened(printable(value), LONGEST_NAME) if isinstance(value, str) else ""
