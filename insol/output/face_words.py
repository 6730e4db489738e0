"""What is to be said of one face, in words."""

from __future__ import annotations

import math

from insol.output.view_data import ViewData

MOST_SPELLS = 6


def words_of_face(data: ViewData, row: int, period: str) -> str:
    """Lines that tell a face's part, place and what it has in a period."""
    face = data.faces.iloc[row]
    name = face["name"] if isinstance(face["name"], str) else ""
    part = face["part"] if isinstance(face["part"], str) else ""
    lines = [f"{part or face['measure']}   face {int(face['face'])}" + (f"   {name}" if name else "")]
    facing = "level" if math.isnan(face["azimuth_deg"]) else f"facing {face['azimuth_deg']:.0f}°"
    lines.append(f"{facing}, tilt {face['tilt_deg']:.0f}°, {face['area_m2']:.2f} m², z {face['z_m']:.1f} m")
    if face["status"] != "measured":
        return "\n".join([*lines, "covered: it lies against or inside another body"])
    direct, possible = face[f"{period}_direct_h"], face[f"{period}_possible_h"]
    lines.append(f"direct sun {hours(direct)} ± {hours(face[f'{period}_error_h'])} of {hours(possible)} possible")
    fraction = face[f"{period}_shaded_fraction"]
    if not math.isnan(fraction):
        lines.append(f"shaded fraction {fraction:.2f}")
    return "\n".join([*lines, *spell_lines(data, face, period)])


def spell_lines(data: ViewData, face: object, period: str) -> list[str]:
    """The face's spells of sun, where the period is a day."""
    table = data.spells
    same = (table["period"] == period) & (table["measure"] == face["measure"]) & (table["face"] == face["face"])  # type: ignore[index]
    part = face["part"]  # type: ignore[index]
    same &= (table["part"] == part) if isinstance(part, str) else table["part"].isna()
    found = table[same]
    lines = [
        f"sun {begin} to {end}" for begin, end in zip(found["begin"][:MOST_SPELLS], found["end"][:MOST_SPELLS], strict=True)
    ]
    if len(found) > MOST_SPELLS:
        lines.append(f"and {len(found) - MOST_SPELLS} spells more")
    return lines


def hours(value: float) -> str:
    """Hours to read: minutes under ten hours, whole hours of a long period.

    >>> hours(5.5), hours(1234.4), hours(0.02)
    ('5 h 30 min', '1,234 h', '1 min')
    """
    if value >= 100:
        return f"{value:,.0f} h"
    minutes = round(value * 60)
    if minutes < 60:
        return f"{minutes} min"
    return f"{minutes // 60} h {minutes % 60:02d} min"
