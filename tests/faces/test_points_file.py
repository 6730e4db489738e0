"""Named points from a table: read strictly, placed in the model's frame, turned by the bearing of its axis."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from face_shapes import box, faces_of, scene_of

from insol.errors import MeasureError
from insol.faces.points_file import read_points
from insol.study.description import PointsMeasure, Site

HEADER = "name,x_m,y_m,z_m,azimuth_deg,tilt_deg\n"


@pytest.fixture
def table(tmp_path):
    def write(text, encoding="utf-8"):
        path = tmp_path / "windows.csv"
        path.write_bytes(text.encode(encoding))
        return path

    return write


def test_a_table_with_a_mark_quotes_blank_lines_and_umlauts(table):
    path = table(HEADER + '"Küche, EG",1,2,3.5,180,90\r\n\r\nLoft, 1e1 ,-2,+3,0,30\r\n', encoding="utf-8-sig")
    points = read_points(path)
    assert points.names == ("Küche, EG", "Loft")
    np.testing.assert_array_equal(points.positions, [[1, 2, 3.5], [10, -2, 3]])
    np.testing.assert_array_equal(points.azimuth_deg, [180, 0])
    np.testing.assert_array_equal(points.tilt_deg, [90, 30])


def test_columns_may_stand_in_any_order(table):
    points = read_points(table("tilt_deg,azimuth_deg,z_m,y_m,x_m,name\n90,270,3,2,1,w\n"))
    np.testing.assert_array_equal(points.positions, [[1, 2, 3]])
    assert (points.azimuth_deg[0], points.tilt_deg[0], points.names) == (270, 90, ("w",))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "the file is empty. its first line must be name,x_m,y_m,z_m,azimuth_deg,tilt_deg"),
        ("\n \n", "the file is empty"),
        (HEADER, "there is no point below the header"),
        ("name,x,y_m,z_m,azimuth_deg,tilt_deg\nw,1,2,3,4,5\n", r'line 1: unknown column "x"; allowed: "name", "x_m"'),
        ("name,x_m,y_m,z_m,azimut_deg,tilt_deg\n", 'unknown column "azimut_deg".* did you mean "azimuth_deg"'),
        ("name,x_m,y_m,z_m,azimuth_deg\nw,1,2,3,4\n", 'line 1: missing columns: "tilt_deg"; needed: "name"'),
        ("name,name,y_m,z_m,azimuth_deg,tilt_deg\n", 'the column "name" is there twice'),
        ("name;x_m;y_m;z_m;azimuth_deg;tilt_deg\n", "parted by semicolons. part them by commas"),
        (HEADER + "w,1,2,3,180,90\nv,1,two,3,180,90\n", 'line 3, column y_m: "two" is not a number'),
        (HEADER + "w,1,2,nan,180,90\n", 'line 2, column z_m: "nan" is not a number'),
        (HEADER + "w,1,2,-inf,180,90\n", 'line 2, column z_m: "-inf" is not a number'),
        (HEADER + "w,1_0,2,3,180,90\n", 'line 2, column x_m: "1_0" is not a number'),
        (HEADER + 'w,"1,5",2,3,180,90\n', '"1,5" is not a number. write decimals with a point'),
        (HEADER + "w,1,2,,180,90\n", "line 2, column z_m: a number is missing"),
        (HEADER + "w,1,2,3,180,181\n", "line 2, column tilt_deg: 181 is not within 0 to 180 degrees"),
        (HEADER + "w,1,2,3,180,-1\n", "line 2, column tilt_deg: -1 is not within 0 to 180 degrees"),
        (HEADER + "w,1,2,3,720,90\n", "line 2, column azimuth_deg: 720 is not within -360 to 360 degrees"),
        (HEADER + "w,1,2,3,180\n", "line 2: 5 values, but the header has 6 columns"),
        (HEADER + "w,1,5,2,3,180,90\n", "line 2: 7 values, but the header has 6 columns. write decimals with a point"),
        (HEADER + " ,1,2,3,180,90\n", "line 2, column name: the point has no name"),
        (HEADER + "w,1,2,3,180,90\n\nw,1,2,3,180,90\n", 'line 4, column name: "w" is already the name .* line 2'),
        (HEADER + '"w,1,2,3,180,90\n', "line 2: not a table"),
    ],
)
def test_what_cannot_be_read_is_said_with_file_line_column_and_value(table, text, message):
    path = table(text)
    with pytest.raises(MeasureError, match=message) as fault:
        read_points(path)
    assert str(fault.value).startswith(str(path))
    assert "\n" not in str(fault.value)


def test_a_file_that_is_missing_a_folder_or_not_utf8(table, tmp_path):
    with pytest.raises(MeasureError, match="there is no such file"):
        read_points(tmp_path / "none.csv")
    with pytest.raises(MeasureError, match="cannot be read"):
        read_points(tmp_path)
    with pytest.raises(MeasureError, match=r"byte 40 is not UTF-8\. save it as UTF-8"):
        read_points(table(HEADER + "Küche,1,2,3,4,5\n", encoding="latin-1"))


def test_points_become_faces_without_area_looking_where_they_were_told(table, tmp_path):
    path = table(HEADER + "south,1,-2,3,180,90\nroof,1,2,9,0,0\nslope,5,5,5,270,45\n")
    scene = scene_of(box(0, 0, 1, 1, 1), origin=(100, 200, 10))
    measure = PointsMeasure(name="windows", file=Path(path.name))
    faces = faces_of(
        scene, measure, folder=tmp_path, site=Site(latitude=0, longitude=0, time_zone="UTC", north_deg=90.0)
    )
    assert faces.names == ("south", "roof", "slope")
    assert faces.number.tolist() == [1, 2, 3]
    assert (faces.part == -1).all()
    assert (faces.areas == 0).all()
    assert len(faces.outlines) == 0
    np.testing.assert_allclose(faces.points[0] + scene.origin, [1, -2, 3], rtol=0, atol=1e-12)
    # The model's +y axis points east: south is at its right hand, +x, and west behind it, -y.
    half = np.sqrt(0.5)
    np.testing.assert_allclose(faces.normals, [[1, 0, 0], [0, 0, 1], [0, -half, half]], rtol=0, atol=1e-12)
    assert faces.spacings.tolist() == [0.0]
