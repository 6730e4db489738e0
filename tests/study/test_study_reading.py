"""A study file becomes the frozen description, or one line that says where and what."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import pytest

import insol
from insol.errors import StudyError
from insol.study.description import FacesMeasure, GroundMeasure, Model, Period, PointsMeasure, Site
from insol.study.reading import load_study

Write = Callable[[str], Path]


def refused(path: Path) -> str:
    """The line that a study is refused with, its folder left out."""
    with pytest.raises(StudyError) as caught:
        load_study(path)
    line = str(caught.value)
    assert caught.value.exit_code == 2
    assert "\n" not in line
    return line.replace(str(path.parent) + os.sep, "").replace(str(path.parent), "FOLDER")


def test_every_key_is_read(written: Write, valid: str, folder: Path) -> None:
    study = insol.load_study(written(valid))
    assert study.title == "New block at the tannery"
    assert study.hours_per_day == (1.0, 2.5)
    assert study.site == Site(
        latitude=53.41, longitude=-2.99, time_zone="Europe/London", elevation_m=12.0, north_deg=0.0
    )
    assert study.models == (
        Model(file=Path("surroundings.obj"), units="m", up="z", role="surroundings"),
        Model(file=Path("proposed.obj"), units="mm", up="y", role="proposed"),
    )
    assert study.measures == (
        FacesMeasure(name="facades", spacing_m=1.0, parts=("block-*",), roles=("proposed",)),
        GroundMeasure(
            name="square", spacing_m=2.0, height_m=0.5, polygon=((0.0, 0.0), (40.0, 0.0), (40.0, 30.0), (0.0, 30.0))
        ),
        PointsMeasure(name="windows", file=Path("windows.csv")),
    )
    assert study.periods == (
        Period(
            name="equinox", days="03-21", year=2025, start="09:00", end="15:00", clock="local", step_min=60,
            lowest_altitude_deg=5.0,
        ),
        Period(name="winter", days="10-01/03-31", year=2024),
    )  # fmt: skip
    assert study.folder == folder
    assert study.path_of(study.models[0].file) == folder / "surroundings.obj"


def test_a_study_without_a_title_is_called_like_its_file(written: Write, valid: str) -> None:
    assert load_study(written(valid.replace('title = "New block at the tannery"\n', ""))).title == "study"


def test_the_files_own_polygons_are_a_spacing_of_zero(written: Write, valid: str) -> None:
    study = load_study(written(valid.replace("spacing_m = 1.0", 'spacing_m = "as-modelled"')))
    assert isinstance(study.measures[0], FacesMeasure)
    assert study.measures[0].spacing_m == 0.0


def test_a_polygon_may_repeat_its_first_corner(written: Write, valid: str) -> None:
    plain = load_study(written(valid))
    closed = load_study(written(valid.replace("[0, 30]]", "[0, 30], [0, 0]]")))
    assert plain.measures == closed.measures


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-8"])
def test_a_byte_order_mark_and_windows_line_ends_change_nothing(folder: Path, valid: str, encoding: str) -> None:
    path = folder / "study.toml"
    path.write_bytes(valid.replace("\n", "\r\n").encode(encoding))
    assert load_study(path).measures[0].name == "facades"
    path.write_bytes(valid.replace("\n", "\r\n").replace("spacing_m = 2", "spacing_m = -2").encode(encoding))
    assert "study.toml, line 35, " in refused(path)


NUMBER = "must be a number from"
WRONG = [
    # site
    ("latitude = 53.41", "latitude = 95", "line 5, site.latitude: must be a number from -90 to 90 [degrees], not 95"),
    ("latitude = 53.41", 'latitude = "53.41"', 'not "53.41". write it without quotes'),
    ("latitude = 53.41", "latitude = true", "site.latitude: must be a number from -90 to 90 [degrees], not true"),
    ("latitude = 53.41", "latitude = nan", "must be a number from -90 to 90 [degrees], not nan"),
    ("latitude = 53.41", "latitude = inf", "must be a number from -90 to 90 [degrees], not inf"),
    ("latitude = 53.41", "latitude = [53]", "must be a number from -90 to 90 [degrees], not [53]"),
    ("longitude = -2.99", "longitude = 181", "longitude: must be a number from -180 to 180 [degrees], not 181"),
    ("elevation_m = 12", "elevation_m = 9001", "elevation_m: must be a number from -500 to 9000 [m], not 9001"),
    ("north_deg = 0", "north_deg = 361", "north_deg: must be a number from -360 to 360 [degrees], not 361"),
    (
        '"Europe/London"', '"Europe/Lundon"',
        'line 7, site.time_zone: "Europe/Lundon" is not a time zone; allowed: an IANA name such as "Europe/London", '
        'or an offset from UTC such as "+05:30". did you mean "Europe/London"',
    ),
    ('"Europe/London"', "1", "site.time_zone: must be an IANA name such as"),
    (
        "latitude = 53.41            # degrees\n", "",
        "line 4, site: latitude is missing: latitude of the site, north positive. "
        "it must be a number from -90 to 90 [degrees]",
    ),
    (
        "latitude = 53.41", "lattitude = 53.41",
        'line 5, site.lattitude: the key "lattitude" is not known. did you mean "latitude"',
    ),
    # models
    (
        'units = "m"', 'units = "metres"',
        'line 13, model[1] "surroundings.obj".units: must be "mm", "cm", "m", "in" or "ft", not "metres". '
        'did you mean "m"?',
    ),
    ('units = "m"', 'units = "M"', 'not "M". did you mean "m"?'),
    ('units = "m"', "units = 1", 'units: must be "mm", "cm", "m", "in" or "ft", not 1'),
    (
        'units = "m"\n', "",
        'line 11, model[1] "surroundings.obj": units is missing: the unit of the file\'s numbers; it is never guessed. '
        'it must be "mm", "cm", "m", "in" or "ft"',
    ),
    ('up = "z"', 'up = "x"', 'line 14, model[1] "surroundings.obj".up: must be "z" or "y", not "x"'),
    ('role = "surroundings"', 'role = "surounding"', 'not "surounding". did you mean "surroundings"'),
    (
        '"surroundings.obj"', '"Surroundngs.obj"',
        'line 12, model[1] "Surroundngs.obj".file: there is no file "Surroundngs.obj" in FOLDER. '
        'did you mean "surroundings.obj"',
    ),
    ('"surroundings.obj"', '"models/a.obj"', 'there is no file "models/a.obj": there is no folder models'),
    ('"surroundings.obj"', '"."', 'model[1] ".".file: "." is a folder, not a file'),
    ('"surroundings.obj"', '""', "file: must be the name of a file, relative to the study's folder, in quotes, not"),
    # measures
    (
        'kind = "faces"', 'kind = "face"',
        'line 25, measure[1] "facades".kind: must be one of "faces", "ground", "points", not "face". '
        'did you mean "faces"?',
    ),
    ('kind = "faces"\n', "", 'line 23, measure[1] "facades": kind is missing: one of "faces", "ground", "points"'),
    (
        'parts = ["block-*"]\nroles = ["proposed"]\n', "",
        'line 23, measure[1] "facades": parts and roles are missing: at least one of them says which faces are '
        'measured. for example parts = ["block-*"] or roles = ["proposed"]; parts = ["*"] takes all',
    ),
    ('parts = ["block-*"]', 'parts = "block-*"', 'not "block-*". write ["block-*"]'),
    ('parts = ["block-*"]', "parts = []", 'measure[1] "facades".parts: must not be empty'),
    ('parts = ["block-*"]', "parts = [1]", 'measure[1] "facades".parts[1]: must be a text of one line'),
    (
        'roles = ["proposed"]', 'roles = ["existing"]',
        'line 27, measure[1] "facades".roles: no model has the role "existing". models have: proposed, surroundings',
    ),
    ('roles = ["proposed"]', 'role = ["proposed"]', 'the key "role" is not known. did you mean "roles"?'),
    ("spacing_m = 1.0", "spacing_m = 0", "spacing_m: must be a number from 0.001 to 10000 [m], not 0"),
    ("spacing_m = 1.0", "spacing_m = -1", "spacing_m: must be a number from 0.001 to 10000 [m], not -1"),
    ("spacing_m = 1.0", "spacing_m = inf", "not inf"),
    ("spacing_m = 1.0", 'spacing_m = "as modelled"', 'not "as modelled". did you mean "as-modelled"?'),
    (
        "spacing_m = 1.0", "spacing = 1.0",
        'line 28, measure[1] "facades".spacing: the key "spacing" is not known. did you mean "spacing_m"?',
    ),
    (
        "spacing_m = 1.0", "spacing = 1.0\nfoo = 1\nbar = 2",
        'the key "spacing" is not known (and 2 more such keys). did you mean "spacing_m"?',
    ),
    (
        "spacing_m = 1.0", "spacing_m = 1.0\nheight_m = 1",
        'the key "height_m" is not known. height_m is a key of [[measure]] of kind "ground"',
    ),
    (
        "polygon = [[0, 0], [40, 0], [40, 30], [0, 30]]", "polygon = [[0, 0], [40, 0], [0, 30], [40, 30]]",
        'line 33, measure[2] "square".polygon: crosses or touches itself: '
        "side 2 from [40, 0] to [0, 30] and side 4 from [40, 30] to [0, 0]",
    ),
    (
        "polygon = [[0, 0], [40, 0], [40, 30], [0, 30]]", "polygon = [[0, 0], [40, 0]]",
        "has 2 corners, and a polygon needs three",
    ),
    (
        "polygon = [[0, 0], [40, 0], [40, 30], [0, 30]]", "polygon = [[0, 0], [40, 0, 1], [40, 30]]",
        'measure[2] "square".polygon[2]: must be a corner [x, y] in metres, not [40, 0, 1]',
    ),
    ("[40, 30]", "[40, nan]", 'measure[2] "square".polygon[3]: must be a number'),
    (
        "polygon = [[0, 0], [40, 0], [40, 30], [0, 30]]\n", "",
        'line 30, measure[2] "square": polygon and parts are both missing: a ground is measured inside a polygon '
        "or over parts. give one of them",
    ),
    ("height_m = 0.5", 'height_m = 0.5\nparts = ["a"]', "polygon and parts are both given"),
    (
        'name = "square"', 'name = "Facades"',
        'line 31, measure[2] "Facades".name: "Facades" is the name of measure[1] already. '
        "names must differ by more than capitals",
    ),
    (
        'name = "square"', 'name = "my square"',
        'measure[2] "my square".name: must be a name of up to 60 letters, digits, - _ and . '
        'that begins with a letter or a digit, not "my square". "my-square" would do',
    ),
    ('name = "square"', 'name = "../square"', '"square" would do'),
    ('name = "square"', 'name = "=1+1"', 'must be a name of up to 60 letters'),
    ('name = "square"', 'name = "@a"', 'must be a name of up to 60 letters'),
    ('name = "square"', 'name = "-a"', 'must be a name of up to 60 letters'),
    ('name = "square"', 'name = "a\\u0000b"', 'must be a name of up to 60 letters'),
    ('name = "square"', 'name = "aux"', '"aux" cannot be the name of a file on every system. give another name'),
    (
        '"windows.csv"', '"window.csv"',
        'line 40, measure[3] "windows".file: there is no file "window.csv" in FOLDER. did you mean "windows.csv"?',
    ),
    # periods
    ('"03-21"', '"02-30"', 'line 44, period[1] "equinox".days: "02-30" is not a day of 2025'),
    ('"03-21"', '"02-29"', "2025 is no leap year"),
    ('"03-21"', '"equinoxx"', 'did you mean "equinox"'),
    (
        '"03-21"', "2025-03-21",
        'line 44, period[1] "equinox".days: must be days such as "03-21", "10-01/03-31", "year" or "june-solstice", '
        'in quotes, not the date 2025-03-21. write days = "03-21" and year = 2025',
    ),
    ('"03-21"', "03-21", "line 44, column 9: not valid TOML: expected newline or end of document after a statement. "
                         "put days and times in quotes"),
    ("year = 2025", "year = 1899", 'period[1] "equinox".year: must be a whole number from 1900 to 2100, not 1899'),
    ("year = 2025", "year = 2025.0", "must be a whole number from 1900 to 2100, not 2025.0"),
    ("year = 2025", 'year = "2025"', 'not "2025". write it without quotes'),
    ('from = "09:00"', "from = 09:00:00", 'not the time 09:00:00. write "09:00"'),
    ('from = "09:00"', 'from = "9:00"', 'not "9:00". write "09:00"'),
    ('from = "09:00"', 'from = "25:00"', 'must be a time of day from "00:00" to "24:00", in quotes, not "25:00"'),
    (
        'from = "09:00"', 'from = "15:00"',
        'line 47, period[1] "equinox".to: must be later than from, "15:00", not "15:00". '
        "a window cannot run over midnight",
    ),
    ('clock = "local"', 'clock = "utc"', 'clock: must be "local", "standard" or "solar", not "utc"'),
    (
        "step_min = 60", "step_min = 7",
        'step_min: must be a divisor of 60: 1, 2, 3, 4, 5, 6, 10, 12, 15, 20, 30, 60 [minutes], not 7',
    ),
    ("step_min = 60", "step_min = true", "not true"),
    ("lowest_altitude_deg = 5", "lowest_altitude_deg = 90", "must be a number from 0 to below 90 [degrees], not 90"),
    # the file as a whole
    ("[site]", "[[site]]", "site: must be a single table, [site], not a list of tables"),
    (
        '[[model]]\nfile = "surroundings.obj"', '[[models]]\nfile = "surroundings.obj"',
        'line 11, models: the key "models" is not known. did you mean "model"?',
    ),
    (
        "lowest_altitude_deg = 5", 'lowest_altitude_deg = 5\ntitle = "late"',
        'line 51, period[1] "equinox".title: the key "title" is not known. '
        "title belongs at the top of the file, above the first table",
    ),
    ("hours_per_day = [1, 2.5]", "hours_per_day = [2, 2.0]", "hours_per_day: holds the same value twice: [2, 2.0]"),
    ("hours_per_day = [1, 2.5]", "hours_per_day = [25]", "hours_per_day[1]: must be a number from 0 to 24 [h], not 25"),
    # no TOML
    ("latitude = 53.41", "latitude = 53,41", "write numbers with a dot, not a comma"),
    ('up = "z"', "up = z", "line 14, column 6: not valid TOML: invalid value. put texts in quotes"),
    ('up = "z"', 'up = "z', "line 14, column 8: not valid TOML: illegal character '\\n'. a closing quote is missing"),
    ('"surroundings.obj"', '"C:\\models\\a.obj"', "in a path write / between folders"),
    ("latitude = 53.41", "latitude: 53.41", "write = between key and value"),
    ("latitude = 53.41", "latitude = ", "a value is missing"),
    ("latitude = 53.41", "latitude = 53.41\nlatitude = 50", "a key or table is given twice"),
    ('[[model]]\nfile = "proposed.obj"', '[model]\nfile = "proposed.obj"', "that may repeat are written [[model]]"),
    ("elevation_m = 12", "elevation_m = 1" + "0" * 5000, "a number has thousands of digits"),
    ("elevation_m = 12", "elevation_m = 1" + "0" * 400, "must be a number from -500 to 9000 [m], not 1000"),
    ("latitude = 53.41", "latitude = " + "[" * 20_000, "lists or tables lie too deep within one another"),
]  # fmt: skip


@pytest.mark.parametrize(("right", "wrong", "said"), WRONG, ids=[f"{i}-{w[1][:30]!r}" for i, w in enumerate(WRONG)])
def test_what_is_wrong_is_said(written: Write, valid: str, right: str, wrong: str, said: str) -> None:
    assert right in valid
    line = refused(written(valid.replace(right, wrong, 1)))
    assert said in line
    assert line.startswith("study.toml")
    assert len(line) < 600


@pytest.mark.parametrize("header", ["site", "model", "measure", "period"])
def test_every_section_is_needed(written: Write, valid: str, header: str) -> None:
    blocks = [block for block in valid.split("\n\n") if not block.strip("[").startswith(f"{header}]")]
    line = refused(written("\n\n".join(blocks)))
    assert f"[{header}]" in line
    assert "is missing" in line


def test_a_single_bracket_where_tables_may_repeat(written: Write, valid: str) -> None:
    blocks = valid.split("\n\n")
    text = "\n\n".join([*blocks[:-2], blocks[-1].replace("[[period]]", "[period]")])
    assert "period: must be a list of tables, [[period]], not a single table" in refused(written(text))


def test_wrong_files(folder: Path, valid: str) -> None:
    study = folder / "study.toml"
    assert refused(folder / "study.toml") == (
        "study.toml: there is no such study file. insol new MODEL... writes a starter study"
    )
    study.write_text(valid, encoding="utf-8")
    assert 'did you mean "study.toml"?' in refused(folder / "stduy.toml")
    if not (folder / "STUDY.TOML").exists():
        assert 'did you mean "study.toml"?' in refused(folder / "STUDY.TOML")
    with pytest.raises(StudyError, match=r"this is a folder, not a study file. in it is study\.toml"):
        load_study(folder)
    assert "this is not a study file, which is a TOML text" in refused(folder / "proposed.obj")
    study.write_bytes(b"\xef\xbb\xbf \n")
    assert "study.toml: the file is empty" in refused(study)
    study.write_bytes(valid.replace("tannery", "café").encode("latin-1"))
    assert "study.toml, line 1: not UTF-8 text: the byte 0xe9 at position 29. save the file as UTF-8" in refused(study)
    study.write_bytes(valid.encode("utf-16"))
    assert "line 1: not UTF-8 but UTF-16 text" in refused(study)


def test_a_hostile_name_stays_in_its_line(written: Write, valid: str) -> None:
    line = refused(written(valid.replace('name = "square"', 'name = "a\\nb\\u001b[31m"')))
    assert "\x1b" not in line


def test_reading_a_study_imports_nothing_heavy() -> None:
    import subprocess
    import sys

    code = (
        "import sys, insol.study.reading\n"
        "heavy = {'numpy', 'pandas', 'scipy', 'pvlib', 'shapely', 'trimesh', 'click'} & set(sys.modules)\n"
        "sys.exit(str(heavy) if heavy else 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
