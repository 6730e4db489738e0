"""Time zones as a study writes them: an IANA name or a fixed offset; never a guess."""

from __future__ import annotations

import re
from datetime import timedelta, timezone, tzinfo
from zoneinfo import ZoneInfo, available_timezones

from insol.errors import StudyError, did_you_mean

OFFSET = re.compile(r"([+-])(\d{2}):?(\d{2})")
LARGEST_OFFSET = timedelta(hours=14)


def zone_of(text: str) -> tzinfo:
    """The time zone that a study names.

    Raises
    ------
    StudyError
        Neither an IANA name nor an offset from -14:00 to +14:00.

    >>> zone_of("+05:30").utcoffset(None)
    datetime.timedelta(seconds=19800)
    """
    offset = OFFSET.fullmatch(text.strip())
    if offset:
        sign, hours, minutes = offset.groups()
        shift = timedelta(hours=int(hours), minutes=int(minutes))
        if shift <= LARGEST_OFFSET and int(minutes) < 60:
            return timezone(-shift if sign == "-" else shift)
    try:
        return ZoneInfo(text)
    except (KeyError, ValueError, OSError):
        hint = did_you_mean(text, available_timezones()) if text else ""
        raise StudyError(
            f'"{text}" is not a time zone; allowed: an IANA name such as "Europe/London", '
            'or an offset from UTC such as "+05:30"',
            hint=hint,
        ) from None
