"""The OBJ reader: names, polygons, odd but readable files, and one clear line for what cannot be read."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from builders import box, obj_text
from hypothesis import given
from hypothesis import strategies as st

from insol.errors import ModelError
from insol.scene.model import Mesh, normals_and_areas
from insol.scene.obj import read_obj
from insol.scene.reading import read_mesh

SQUARE = "v 0 0 0\nv 1 0 0\nv 1 1 0\nv 0 1 0\n"


def read(folder: Path, text: str | bytes, name: str = "model.obj") -> Mesh:
    path = folder / name
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_mesh(path)


def area(mesh: Mesh) -> float:
    return float(normals_and_areas(mesh.vertices[mesh.triangles])[1].sum())


@pytest.mark.parametrize(
    ("body", "names"),
    [
        ("f 1 2 3 4", ("model",)),
        ("o a\nf 1 2 3 4", ("a",)),
        ("g b\nf 1 2 3\nf 1 3 4", ("b",)),
        ("o a\ng wall\nf 1 2 3\ng roof\nf 1 3 4", ("a/wall", "a/roof")),
        ("o a\ng a\nf 1 2 3 4", ("a",)),
        ("o a\nusemtl glass\nf 1 2 3 4", ("a",)),
        ("o a\nusemtl glass\nf 1 2 3\nusemtl stone\nf 1 3 4", ("a/glass", "a/stone")),
        ("usemtl glass\nf 1 2 3\nusemtl stone\nf 1 3 4", ("glass", "stone")),
        ("o a\ng x\nf 1 2 3\no b\nf 1 3 4", ("a/x", "b")),
        ("o block a, floor 1\nf 1 2 3 4", ("block a, floor 1",)),
    ],
)
def test_names_join_object_group_and_material(tmp_path: Path, body: str, names: tuple[str, ...]) -> None:
    assert read(tmp_path, SQUARE + body + "\n").part_names == names


@pytest.mark.parametrize(
    "text",
    [
        SQUARE.replace(" ", "\t") + "f\t1\t2\t3\t4\n",
        SQUARE.replace(" ", "   ") + "f  1 2 3   4  \n",
        SQUARE.replace("\n", "\r\n") + "f 1 2 3 4\r\n",
        "\ufeff" + SQUARE + "f 1 2 3 4\n",
        SQUARE + "f 1 2 \\\n3 4\n",
        SQUARE + "f -4 -3 -2 -1\n",
        SQUARE + "vt 0 0\nvn 0 0 1\nf 1/1/1 2/1/1 3//1 4/1\n",
        SQUARE.replace("0\nv", "0 0.5 0.5 0.5\nv") + "f 1 2 3 4\n",
        "mtllib not-there.mtl\nusemtl x\n" + SQUARE + "s off\nf 1 2 3 4\n",
        SQUARE + "f " + "1 2 3 4 " * 300 + "\n",
        SQUARE + "f 1 2 3 4",
    ],
)
def test_odd_files_are_read_rightly(tmp_path: Path, text: str) -> None:
    mesh = read(tmp_path, text)
    assert area(mesh) == pytest.approx(1.0)
    assert len(mesh.triangles) == 2


@pytest.mark.parametrize("encoding", ["utf-16", "utf-16-le", "utf-16-be", "latin-1", "utf-8-sig"])
def test_encodings(tmp_path: Path, encoding: str) -> None:
    mesh = read(tmp_path, ("o Größe\n" + SQUARE + "f 1 2 3 4\n").encode(encoding))
    assert mesh.part_names == ("Größe",)


def test_concave_polygons_keep_their_area(tmp_path: Path) -> None:
    """A U of three by three with a notch of one by two: seven, not the eleven and a half of a fan."""
    outline = [(0, 0), (3, 0), (3, 3), (2, 3), (2, 1), (1, 1), (1, 3), (0, 3)]
    text = "".join(f"v {x} 0 {y}\n" for x, y in outline) + "f 1 2 3 4 5 6 7 8\n"
    mesh = read(tmp_path, text)
    assert area(mesh) == pytest.approx(7.0)
    assert set(mesh.polygon) == {0}
    normals, _ = normals_and_areas(mesh.vertices[mesh.triangles])
    np.testing.assert_allclose(normals, np.tile([0, -1, 0], (6, 1)), atol=1e-12)


def test_triangles_know_their_polygon(tmp_path: Path) -> None:
    mesh = read(tmp_path, obj_text({"a": box(0, 0, 0, 1, 2, 3)}))
    np.testing.assert_array_equal(np.bincount(mesh.polygon), [2] * 6)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "the file is empty"),
        ("# nothing\n", "holds no faces"),
        (SQUARE, "holds points but no faces"),
        (SQUARE + "l 1 2 3\n", "holds points but no faces"),
        (SQUARE + "f 1 2 0\n", 'model.obj:5: a face names the vertex "0", which counts from 1'),
        (SQUARE + "f 1 2 9\n", 'model.obj:5: a face names the vertex "9", which is not one of the file\'s 4 vertices'),
        (SQUARE + "f -9 2 3\n", 'model.obj:5: a face names the vertex "-9"'),
        (SQUARE + "f 1 2 x\n", 'model.obj:5: a face names the vertex "x", which is not the number of a vertex'),
        (SQUARE + "f 1 2\n", "model.obj:5: a face needs three corners"),
        ("v 0 0\nf 1 1 1\n", "model.obj:1: a vertex needs three numbers"),
        ("v 0,5 1,0 0\nf 1 1 1\n", '"0,5" is not a finite number. use a decimal point, not a comma'),
        ("v nan 0 0\nf 1 1 1\n", 'vertex 1: "nan" is not a finite number'),
        ("v 0 0 0\nv 1e999 0 0\nf 1 1 1\n", 'vertex 2: "1e999" is not a finite number'),
        (SQUARE + "f 1 2 99999999999999999999999\n", "is not the number of a vertex"),
    ],
)
def test_what_cannot_be_read_is_said_in_one_line(tmp_path: Path, text: str, said: str) -> None:
    with pytest.raises(ModelError) as refused:
        read(tmp_path, text)
    assert said in str(refused.value)
    assert "\n" not in str(refused.value)


def test_missing_files_folders_and_unknown_endings(tmp_path: Path) -> None:
    (tmp_path / "block.obj").write_text(SQUARE + "f 1 2 3 4\n")
    with pytest.raises(ModelError, match=r'there is no such file. did you mean "block.obj"?'):
        read_mesh(tmp_path / "blok.obj")
    with pytest.raises(ModelError, match="this is a folder, not a mesh file"):
        read_mesh(tmp_path)
    (tmp_path / "model.doc").write_text("x")
    with pytest.raises(ModelError, match=r'".doc" files are not read; allowed: ".obj"'):
        read_mesh(tmp_path / "model.doc")


numbers = st.floats(-1e4, 1e4).map(lambda x: round(x, 3))


@given(
    st.lists(st.tuples(numbers, numbers, numbers), min_size=3, max_size=9, unique=True),
    st.data(),
)
def test_equal_spellings_read_equal(
    tmp_path_factory: pytest.TempPathFactory, points: list[tuple[float, float, float]], data: st.DataObject
) -> None:
    """Indices from the front or the back, with or without texture, with any blanks."""
    count = len(points)
    faces = data.draw(st.lists(st.permutations(range(count)).map(lambda order: order[:3]), min_size=1, max_size=6))
    head = "".join(f"v {x!r} {y!r} {z!r}\n" for x, y, z in points)
    plain = head + "".join("f " + " ".join(str(corner + 1) for corner in face) + "\n" for face in faces)
    odd = head.replace(" ", data.draw(st.sampled_from([" ", "  ", "\t"])))
    for face in faces:
        back, texture = data.draw(st.booleans()), data.draw(st.sampled_from(["", "/1", "//2", "/3/4"]))
        odd += "f " + "\t".join(f"{corner - count if back else corner + 1}{texture}" for corner in face) + " \n"
    folder = tmp_path_factory.mktemp("spellings")
    (folder / "plain.obj").write_text(plain)
    (folder / "odd.obj").write_text(odd)
    first, second = read_obj(folder / "plain.obj"), read_obj(folder / "odd.obj")
    np.testing.assert_array_equal(first.vertices, second.vertices)
    np.testing.assert_array_equal(first.triangles, second.triangles)
