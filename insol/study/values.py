"""What a key may hold: each kind of value with the words that say what is allowed, and how it is taken."""

from __future__ import annotations

import datetime
import math
import re
import unicodedata
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal

from insol.errors import InsolError
from insol.study.place import Place, nearest, shown

AS_MODELLED = "as-modelled"
"""The spacing of a measure whose faces are the file's own polygons, whole."""

LONGEST_TEXT = 200
LONGEST_NAME = 60
LARGEST_COORDINATE_M = 1e8
"""Beyond any national grid by a factor of ten."""

_CLOCK_TIME = re.compile(r"([01]\d|2[0-3]):[0-5]\d|24:00")
_NAME = re.compile(r"[^\W_](?:[\w.-]*[\w-])?")
_RESERVED = re.compile(r"(?i)(con|prn|aux|nul|com\d|lpt\d)(\..*)?")
"""Names that no file can have on Windows."""


@dataclass(frozen=True)
class Value:
    """A kind of value.

    Attributes
    ----------
    allowed : completes the sentence "must be ..."
    take : what the file holds, checked and turned into what the study holds
    give : the other way round
    """

    allowed: str
    take: Callable[[object, Place], Any]
    give: Callable[[Any], Any] = lambda taken: taken


def number(low: float = -math.inf, high: float = math.inf, unit: str = "", *, below: bool = False) -> Value:
    """A finite number from `low` to `high`, or below `high`; whole numbers are numbers, true is not."""
    limits = f" from {low:g} {'to below' if below else 'to'} {high:g}" if math.isfinite(high - low) else ""
    allowed = f"a number{limits}" + (f" [{unit}]" if unit else "")

    def take(raw: object, place: Place) -> float:
        if isinstance(raw, bool) or not isinstance(raw, (int, float)):
            raise place.must_be(allowed, raw, "write it without quotes" if _is_number(raw) else "")
        if not low <= raw <= high or (below and raw == high) or (isinstance(raw, float) and not math.isfinite(raw)):
            raise place.must_be(allowed, raw)
        return float(raw)

    return Value(allowed, take)


def spacing(low: float, high: float) -> Value:
    """A length of faces, or the word that keeps the file's own polygons, held as 0."""
    length = number(low, high, "m")
    allowed = f'{length.allowed}, or "{AS_MODELLED}"'

    def take(raw: object, place: Place) -> float:
        if raw == AS_MODELLED:
            return 0.0
        if isinstance(raw, str) and not _is_number(raw):
            raise place.must_be(allowed, raw, nearest(raw, [AS_MODELLED]))
        return float(length.take(raw, place))

    return Value(allowed, take, give=lambda taken: taken or AS_MODELLED)


def whole(low: int, high: int) -> Value:
    """A whole number from `low` to `high`."""
    allowed = f"a whole number from {low} to {high}"

    def take(raw: object, place: Place) -> int:
        if isinstance(raw, bool) or not isinstance(raw, int) or not low <= raw <= high:
            raise place.must_be(allowed, raw, "write it without quotes" if _is_number(raw) else "")
        return raw

    return Value(allowed, take)


def divisor(of: int, unit: str) -> Value:
    """A whole number that divides another without rest."""
    divisors = [candidate for candidate in range(1, of + 1) if of % candidate == 0]
    allowed = f"a divisor of {of}: {', '.join(map(str, divisors))} [{unit}]"

    def take(raw: object, place: Place) -> int:
        if isinstance(raw, bool) or not isinstance(raw, int) or raw not in divisors:
            raise place.must_be(allowed, raw, "write it without quotes" if _is_number(raw) else "")
        return raw

    return Value(allowed, take)


def text(longest: int = LONGEST_TEXT) -> Value:
    """A line of text."""
    allowed = f"a text of one line, up to {longest} characters"

    def take(raw: object, place: Place) -> str:
        if not isinstance(raw, str) or len(raw) > longest or not raw.isprintable():
            raise place.must_be(allowed, raw)
        return raw

    return Value(allowed, take)


def name() -> Value:
    """A name that serves as the name of a column, of a file, and on the command line."""
    allowed = f"a name of up to {LONGEST_NAME} letters, digits, - _ and . that begins with a letter or a digit"

    def take(raw: object, place: Place) -> str:
        if not isinstance(raw, str):
            raise place.must_be(allowed, raw)
        composed = unicodedata.normalize("NFC", raw)
        if _RESERVED.fullmatch(composed):
            raise place.refuse(f"{shown(raw)} cannot be the name of a file on every system", "give another name")
        if len(composed) > LONGEST_NAME or not _NAME.fullmatch(composed):
            fitting = re.sub(r"[^\w.-]+", "-", composed).strip("-_.")[:LONGEST_NAME].rstrip(".")
            raise place.must_be(allowed, raw, f'"{fitting}" would do' if _NAME.fullmatch(fitting) else "")
        return composed

    return Value(allowed, take)


def word(words: Sequence[str], also: Mapping[str, str] | None = None) -> Value:
    """One of some words; `also` holds other names of them, for the hint only."""
    allowed = _either(words)

    def take(raw: object, place: Place) -> str:
        if not isinstance(raw, str):
            raise place.must_be(allowed, raw)
        if raw not in words:
            raise place.must_be(allowed, raw, nearest(raw, words, also))
        return raw

    return Value(allowed, take)


def clock_time() -> Value:
    """A time of day."""
    allowed = 'a time of day from "00:00" to "24:00", in quotes'

    def take(raw: object, place: Place) -> str:
        if not isinstance(raw, str) or not _CLOCK_TIME.fullmatch(raw):
            raise place.must_be(allowed, raw, _as_clock_time(raw))
        return raw

    return Value(allowed, take)


def time_zone() -> Value:
    """An IANA name or an offset."""
    allowed = 'an IANA name such as "Europe/London", or an offset from UTC such as "+05:30"'

    def take(raw: object, place: Place) -> str:
        from insol.study.zones import zone_of

        if not isinstance(raw, str):
            raise place.must_be(allowed, raw)
        try:
            zone_of(raw)
        except InsolError as refused:
            raise place.refuse(refused.what, refused.hint) from None
        return raw

    return Value(allowed, take)


def days() -> Value:
    """Which days of a year; what they are in that year is checked with the year."""
    allowed = 'days such as "03-21", "10-01/03-31", "year" or "june-solstice", in quotes'

    def take(raw: object, place: Place) -> str:
        if isinstance(raw, datetime.date):
            raise place.must_be(allowed, raw, f'write days = "{raw:%m-%d}" and year = {raw.year}')
        if not isinstance(raw, str) or not raw.isprintable() or len(raw) > LONGEST_TEXT:
            raise place.must_be(allowed, raw)
        return raw

    return Value(allowed, take)


def path() -> Value:
    """The name of a file, relative to the study's folder."""
    allowed = "the name of a file, relative to the study's folder, in quotes"

    def take(raw: object, place: Place) -> Path:
        if not isinstance(raw, str) or not raw.strip() or not raw.isprintable():
            raise place.must_be(allowed, raw)
        return Path(raw)

    return Value(allowed, take, give=Path.as_posix)


def several(of: Value, *, least: Literal[0, 1] = 1, most: int = 100_000, different_by: str = "") -> Value:
    """A list, as a tuple; with `different_by`, a format by which no two of its items may look alike."""
    allowed = f"a list, each item {of.allowed}"

    def take(raw: object, place: Place) -> tuple[object, ...]:
        if not isinstance(raw, list):
            raise place.must_be(allowed, raw, f"write [{shown(raw)}]" if isinstance(raw, (str, int, float)) else "")
        if len(raw) < least:
            raise place.refuse("must not be empty", f"it is {allowed}")
        if len(raw) > most:
            raise place.refuse(f"must hold at most {most} items, not {len(raw)}")
        taken = tuple(of.take(item, place.item(index)) for index, item in enumerate(raw))
        seen = [format(item, different_by) for item in taken] if different_by else []
        if len(set(seen)) < len(seen):
            raise place.refuse(f"holds the same value twice: {shown(raw)}")
        return taken

    return Value(allowed, take, give=list)


def polygon() -> Value:
    """Corners in order; the last is joined to the first."""
    allowed = "a list of three or more corners [x, y] in metres, such as [[0, 0], [40, 0], [40, 30]]"
    coordinate = number(-LARGEST_COORDINATE_M, LARGEST_COORDINATE_M, "m")

    def take(raw: object, place: Place) -> tuple[tuple[float, float], ...]:
        from insol.study.polygons import fault_of

        if not isinstance(raw, list):
            raise place.must_be(allowed, raw)
        corners = []
        for index, pair in enumerate(raw):
            here = place.item(index)
            if not isinstance(pair, list) or len(pair) != 2:
                raise here.must_be("a corner [x, y] in metres", pair)
            corners.append((coordinate.take(pair[0], here), coordinate.take(pair[1], here)))
        if len(corners) > 1 and corners[0] == corners[-1]:
            corners.pop()
        if fault := fault_of(corners):
            raise place.refuse(fault, "" if len(corners) >= 3 else f"it must be {allowed}")
        return tuple(corners)

    return Value(allowed, take, give=lambda corners: [list(corner) for corner in corners])


def _either(words: Sequence[str]) -> str:
    quoted = [f'"{word}"' for word in words]
    return quoted[0] if len(quoted) == 1 else ", ".join(quoted[:-1]) + " or " + quoted[-1]


def _is_number(raw: object) -> bool:
    return isinstance(raw, str) and re.fullmatch(r"\s*[+-]?\d+([.]\d*)?\s*", raw) is not None


def _as_clock_time(raw: object) -> str:
    """A hint with the same time as it has to be written."""
    if isinstance(raw, datetime.time):
        return f'write "{raw:%H:%M}"'
    loose = re.fullmatch(r"\s*(\d{1,2})(?:[:.h](\d{2}))?(?::\d{2})?\s*", raw) if isinstance(raw, str) else None
    if loose is None or int(loose[1]) > 24 or int(loose[2] or 0) > 59:
        return ""
    return f'write "{int(loose[1]):02d}:{loose[2] or "00"}"'
