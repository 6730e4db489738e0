"""Every key of a study file: what it may hold and what it is for.

A new key is a new row, with a field of the same name in the dataclass of `description`; a new
table is a new `Table` with a row in SECTIONS. Reading, writing, messages and hints follow.
"""

from __future__ import annotations

from insol.errors import InsolError
from insol.study.description import (
    CLOCKS,
    ROLES,
    SAMPLINGS,
    UNITS,
    UPS,
    FacesMeasure,
    GroundMeasure,
    Model,
    Period,
    PointsMeasure,
    Site,
)
from insol.study.place import Place, shown
from insol.study.schema import Key, Section, Table
from insol.study.values import (
    clock_time,
    days,
    divisor,
    name,
    number,
    path,
    polygon,
    several,
    spacing,
    text,
    time_zone,
    whole,
    word,
)

UNITS_ALSO = {
    "millimetre": "mm", "millimetres": "mm", "millimeter": "mm", "millimeters": "mm",
    "centimetre": "cm", "centimetres": "cm", "centimeter": "cm", "centimeters": "cm",
    "metre": "m", "metres": "m", "meter": "m", "meters": "m",
    "inch": "in", "inches": "in", '"': "in", "foot": "ft", "feet": "ft", "'": "ft",
}  # fmt: skip
"""Other names of the units, for hints."""

SPACING_LIMITS_M = (0.001, 10_000.0)
"""From the distance that rays begin off a face to more than any building."""


def _check_faces(measure: FacesMeasure, place: Place) -> None:
    if not measure.parts and not measure.roles:
        raise place.refuse(
            "parts and roles are missing: at least one of them says which faces are measured",
            'for example parts = ["block-*"] or roles = ["proposed"]; parts = ["*"] takes all',
        )


def _check_ground(measure: GroundMeasure, place: Place) -> None:
    if bool(measure.polygon) == bool(measure.parts):
        both = "polygon and parts are both " + ("given" if measure.polygon else "missing")
        raise place.refuse(f"{both}: a ground is measured inside a polygon or over parts", "give one of them")


def _check_period(period: Period, place: Place) -> None:
    from insol.study.days import check_days

    try:
        check_days(period.days, period.year)
    except InsolError as refused:
        raise place.key("days").refuse(refused.what, refused.hint) from None
    if period.start is not None and period.end is not None and period.start >= period.end:
        hint = "a window cannot run over midnight"
        raise place.key("to").refuse(f"must be later than from, {shown(period.start)}, not {shown(period.end)}", hint)


SITE = Table(
    make=Site,
    keys=(
        Key("latitude", number(-90, 90, "degrees"), "latitude of the site, north positive"),
        Key("longitude", number(-180, 180, "degrees"), "longitude of the site, east positive"),
        Key("time_zone", time_zone(), "the zone that clock times are read in; it is never guessed"),
        Key("elevation_m", number(-500, 9000, "m"), "height above sea level"),
        Key("north_deg", number(-360, 360, "degrees"), "bearing of the model's +y axis, clockwise from true north"),
    ),
)

MODEL = Table(
    make=Model,
    keys=(
        Key("file", path(), "the mesh file"),
        Key("units", word(UNITS, UNITS_ALSO), "the unit of the file's numbers; it is never guessed"),
        Key("up", word(UPS), "the file's axis that points up"),
        Key("role", word(ROLES), "what the model stands for"),
    ),
    called_by="file",
)

NAME = Key("name", name(), "the name of its columns and files")
PARTS = Key("parts", several(text()), "patterns on the names of parts, such as block-*")

FACES = Table(
    make=FacesMeasure,
    keys=(
        NAME,
        Key("spacing_m", spacing(*SPACING_LIMITS_M), "the largest side of a face"),
        PARTS,
        Key("roles", several(word(ROLES)), "the roles of the models whose faces are measured"),
    ),
    called_by="name",
    check=_check_faces,
)

GROUND = Table(
    make=GroundMeasure,
    keys=(
        NAME,
        Key("spacing_m", number(*SPACING_LIMITS_M, "m"), "the largest side of a cell"),
        Key("polygon", polygon(), "corners of the measured area in the model's x and y"),
        Key("height_m", number(-20_000, 20_000, "m"), "the polygon's z, or the height above the parts' faces"),
        PARTS,
    ),
    called_by="name",
    check=_check_ground,
)

POINTS = Table(
    make=PointsMeasure,
    keys=(NAME, Key("file", path(), "a table with the columns name,x_m,y_m,z_m,azimuth_deg,tilt_deg")),
    called_by="name",
)

PERIOD = Table(
    make=Period,
    keys=(
        NAME,
        Key("days", days(), "the days that are summed"),
        Key("year", whole(1900, 2100), "the year of the days"),
        Key("from", clock_time(), "the window of each day begins", field="start"),
        Key("to", clock_time(), "the window of each day ends", field="end"),
        Key("clock", word(CLOCKS), "the clock that from, to and the days are read by"),
        Key("step_min", divisor(60, "minutes"), "minutes between two samples"),
        Key("lowest_altitude_deg", number(0, 90, "degrees", below=True), "the sun counts from this altitude up"),
        Key("sampling", word(SAMPLINGS), "how the sky is asked: by days, along the year's rows, or at steps"),
    ),
    called_by="name",
    check=_check_period,
)

TOP_KEYS = (
    Key("title", text(), "the heading of pictures and reports"),
    Key(
        "hours_per_day",
        several(number(0, 24, "h"), least=0, most=24, different_by="g"),
        "the part table tells the share of area that has at least these hours a day",
    ),
)

SECTIONS = (
    Section("site", SITE, "where on earth, and how the model lies", field="site"),
    Section("model", MODEL, "a mesh file and how to take it", field="models", many=True),
    Section(
        "measure",
        {"faces": FACES, "ground": GROUND, "points": POINTS},
        "what is measured",
        field="measures",
        many=True,
    ),
    Section("period", PERIOD, "the days that are asked for", field="periods", many=True),
)
