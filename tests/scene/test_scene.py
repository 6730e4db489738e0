"""Other formats, bodies, units and axes, which side is out, health, repair, and the scene of them all."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from builders import Solid, box, ell, gable, joined, make_study, obj_text, pole
from hypothesis import given
from hypothesis import strategies as st

from insol.errors import ModelError
from insol.scene.assemble import load_scene, load_scene_and_health
from insol.scene.model import Scene, normals_and_areas
from insol.scene.placing import extents_in_each_unit, place
from insol.scene.reading import read_mesh
from insol.study.description import Model, Site, Study

SITE = Site(latitude=50.0, longitude=8.0, time_zone="Europe/Berlin")


def scene_of(folder: Path, parts: dict[str, Solid], **model: object) -> Scene:
    return load_scene(make_study(folder, parts, [], [], SITE, **model))


def flipped(solid: Solid, which: set[int] | None = None) -> Solid:
    vertices, polygons = solid
    turn = range(len(polygons)) if which is None else which
    return vertices, [ring[::-1] if number in turn else ring for number, ring in enumerate(polygons)]


def volume(scene: Scene) -> float:
    corners = scene.vertices[scene.triangles]
    return float(np.einsum("ij,ij->i", corners[:, 0], np.cross(corners[:, 1], corners[:, 2])).sum() / 6)


@pytest.mark.parametrize("suffix", ["stl", "ply", "off", "glb"])
def test_other_formats_have_the_same_triangles(tmp_path: Path, suffix: str) -> None:
    import trimesh

    solid = trimesh.creation.box((2.0, 3.0, 4.0))
    solid.export(tmp_path / f"tower.{suffix}")
    mesh = read_mesh(tmp_path / f"tower.{suffix}")
    assert mesh.part_names == ("tower",)
    assert len(mesh.vertices) == 8  # welded
    assert normals_and_areas(mesh.vertices[mesh.triangles])[1].sum() == pytest.approx(52.0)


def test_named_solids_and_nodes_are_parts(tmp_path: Path) -> None:
    import trimesh

    text = ""
    for name, x in (("north wing", 0), ("tower", 5)):
        text += f"solid {name}\n facet normal 0 0 1\n  outer loop\n"
        text += f"   vertex {x} 0 0\n   vertex {x + 1} 0 0\n   vertex {x} 1 0\n  endloop\n endfacet\nendsolid {name}\n"
    (tmp_path / "a.stl").write_text(text)
    assert read_mesh(tmp_path / "a.stl").part_names == ("north wing", "tower")
    nodes = trimesh.Scene()
    move = np.eye(4)
    move[0, 3] = 10.0
    nodes.add_geometry(trimesh.creation.box((1, 1, 1)), node_name="kiosk")
    nodes.add_geometry(trimesh.creation.box((2, 2, 2)), node_name="hall", transform=move)
    nodes.export(tmp_path / "b.glb")
    mesh = read_mesh(tmp_path / "b.glb")
    assert set(mesh.part_names) == {"kiosk", "hall"}
    hall = mesh.vertices[mesh.triangles[mesh.part == mesh.part_names.index("hall")]].reshape(-1, 3)
    np.testing.assert_allclose([hall[:, 0].min(), hall[:, 0].max()], [9, 11])


@pytest.mark.parametrize("suffix", ["stl", "ply", "off", "glb", "gltf"])
@pytest.mark.parametrize("content", [b"", b"garbage \x00\xff\x13" * 9, b"solid x\nfacet", b"ply\nformat ascii 1.0\n"])
def test_damaged_files_are_said_in_one_line(tmp_path: Path, suffix: str, content: bytes) -> None:
    path = tmp_path / f"broken.{suffix}"
    path.write_bytes(content)
    with pytest.raises(ModelError) as refused:
        read_mesh(path)
    assert "\n" not in str(refused.value)
    assert str(path) in str(refused.value)


def test_a_file_without_names_is_split_into_its_bodies(tmp_path: Path) -> None:
    (tmp_path / "yard.obj").write_text(
        obj_text({"all": joined([box(0, 0, 0, 1, 1, 1), box(3, 0, 0, 4, 1, 1)])}).replace("o all\n", "")
    )
    mesh = read_mesh(tmp_path / "yard.obj")
    assert mesh.part_names == ("yard-001", "yard-002")
    assert "2 connected bodies" in mesh.notes[0]
    (tmp_path / "one.obj").write_text(obj_text({"all": box(0, 0, 0, 1, 1, 1)}).replace("o all\n", ""))
    assert read_mesh(tmp_path / "one.obj").part_names == ("one",)


def test_units_and_axes(tmp_path: Path) -> None:
    (tmp_path / "b.obj").write_text(obj_text({"b": box(0, 0, 0, 1000, 2000, 3000)}))
    mesh = read_mesh(tmp_path / "b.obj")
    placed = place(mesh, "mm", "z")
    np.testing.assert_allclose(np.ptp(placed.vertices, axis=0), [1, 2, 3])
    upright = place(mesh, "mm", "y")
    np.testing.assert_allclose(np.ptp(upright.vertices, axis=0), [1, 3, 2])
    for form in (placed, upright):  # right-handed both: the volume keeps its sign
        corners = form.vertices[form.triangles]
        assert np.einsum("ij,ij->i", corners[:, 0], np.cross(corners[:, 1], corners[:, 2])).sum() > 0
    # International foot, 0.3048 m (Treaty of the metre yards, 1959: common knowledge, no source at hand).
    np.testing.assert_allclose(np.ptp(place(mesh, "ft", "z").vertices, axis=0), [304.8, 609.6, 914.4])
    assert [extent.units for extent in extents_in_each_unit(mesh) if extent.plausible] == ["mm", "cm", "in", "ft"]


@given(st.sets(st.integers(0, 7)), st.sampled_from(["box", "ell", "gable"]))
def test_closed_bodies_are_turned_outward_whatever_their_winding(
    tmp_path_factory: pytest.TempPathFactory, turned: set[int], kind: str
) -> None:
    solid = {"box": box(0, 0, 0, 3, 4, 5), "ell": ell(0, 0, 9, 3, 6), "gable": gable(0, 0, 4, 6, 3, 5)}[kind]
    wound = {number for number in turned if number < len(solid[1])}
    scene = scene_of(tmp_path_factory.mktemp("turned"), {"a": flipped(solid, wound)})
    assert volume(scene) > 0
    assert scene.parts[0].sidedness == ("turned" if wound else "outward")
    right = scene_of(tmp_path_factory.mktemp("right"), {"a": solid})
    assert volume(scene) == pytest.approx(volume(right))


@pytest.mark.parametrize("inside_out", [False, True])
def test_an_open_shell_is_turned_by_rays(tmp_path: Path, inside_out: bool) -> None:
    vertices, polygons = box(0, 0, 0, 8, 8, 8)
    shell = vertices, [ring for ring in polygons if not all(vertices[corner][2] == 0 for corner in ring)]
    assert len(shell[1]) == 5
    scene = scene_of(tmp_path, {"shed": flipped(shell) if inside_out else shell})
    normals, _ = normals_and_areas(scene.vertices[scene.triangles])
    centres = scene.vertices[scene.triangles].mean(axis=1) + scene.origin - [4, 4, 4]
    assert (np.einsum("ij,ij->i", normals, centres) > 0).all()
    assert scene.parts[0].sidedness == ("turned" if inside_out else "outward")
    assert "4 edges have no neighbour" in scene.parts[0].doubts[0]


def test_facades_that_close_only_together(tmp_path: Path) -> None:
    vertices, polygons = box(0, 0, 0, 8, 8, 8)
    lines = [f"v {x} {y} {z}" for x, y, z in vertices.tolist()]
    for number, ring in enumerate(polygons):
        wound = ring[::-1] if number in (1, 4) else ring
        lines += [f"o side-{number}", "f " + " ".join(str(corner + 1) for corner in wound)]
    (tmp_path / "model.obj").write_text("\n".join(lines) + "\n")
    study = Study(
        title="",
        site=SITE,
        models=(Model(file=Path("model.obj"), units="m"),),
        measures=(),
        periods=(),
        folder=tmp_path,
    )
    scene = load_scene(study)
    assert volume(scene) == pytest.approx(512.0)
    assert [part.sidedness for part in scene.parts] == ["turned" if n in (1, 4) else "outward" for n in range(6)]
    assert not any(part.doubts for part in scene.parts)


def sheet(corners: list[tuple[float, float, float]]) -> Solid:
    return np.array(corners, dtype=float), [tuple(range(len(corners)))]


def test_sheets_stand_on_both_sides_and_lie_on_one(tmp_path: Path) -> None:
    standing = sheet([(0, 0, 0), (5, 0, 0), (5, 0, 3), (0, 0, 3)])
    lying = sheet([(20, 0, 3), (20, 5, 3), (25, 5, 3), (25, 0, 3)])  # wound downward
    scene = scene_of(tmp_path, {"fence": standing, "canopy": lying})
    assert [part.sidedness for part in scene.parts] == ["two-sided", "turned"]
    normals, _ = normals_and_areas(scene.vertices[scene.triangles[scene.part == 1]])
    np.testing.assert_allclose(normals[:, 2], 1.0)


def test_a_terrain_faces_up(tmp_path: Path) -> None:
    hill = np.array([(0, 0, 0), (10, 0, 0), (10, 10, 0), (0, 10, 0), (5, 5, 6)], dtype=float)
    scene = scene_of(tmp_path, {"hill": (hill, [(1, 0, 4), (1, 4, 2), (3, 2, 4), (0, 3, 4)])}, role="ground")
    normals, _ = normals_and_areas(scene.vertices[scene.triangles])
    assert (normals[:, 2] > 0).all()


def test_two_blocks_that_share_a_wall(tmp_path: Path) -> None:
    scene = scene_of(tmp_path, {"left": box(0, 0, 0, 5, 5, 5), "right": flipped(box(5, 0, 0, 9, 5, 5))})
    assert [part.sidedness for part in scene.parts] == ["outward", "turned"]
    assert volume(scene) == pytest.approx(225.0)


def test_a_part_of_body_and_sheet_is_divided(tmp_path: Path) -> None:
    flag = sheet([(0, 0, 20), (0, 3, 20), (0, 3, 22), (0, 0, 22)])
    scene = scene_of(tmp_path, {"tower": joined([box(-5, -5, 0, 5, 5, 10), flag])})
    assert [(part.name, part.sidedness) for part in scene.parts] == [
        ("tower", "outward"),
        ("tower/sheets", "two-sided"),
    ]


def test_names_that_clash_get_their_file(tmp_path: Path) -> None:
    for name, x in (("now", 0), ("then", 20)):
        (tmp_path / f"{name}.obj").write_text(obj_text({"block": box(x, 0, 0, x + 5, 5, 5), name: pole(x, 9, 3)}))
    models = tuple(Model(file=Path(f"{name}.obj"), units="m") for name in ("now", "then"))
    scene = load_scene(Study(title="", site=SITE, models=models, measures=(), periods=(), folder=tmp_path))
    assert [part.name for part in scene.parts] == ["now/block", "now", "then/block", "then"]
    assert any('called "block"' in doubt for doubt in scene.doubts)
    assert len(np.unique(scene.polygon)) == 24


def test_national_grid_coordinates_keep_their_millimetres(tmp_path: Path) -> None:
    far = np.array([5_400_123.456, 2_600_987.321, 431.007])
    near = scene_of(tmp_path, {"a": box(0, 0, 0, 10.001, 9.999, 5)})
    vertices, polygons = box(0, 0, 0, 10.001, 9.999, 5)
    scene = scene_of(tmp_path, {"a": (vertices + far, polygons)})
    np.testing.assert_allclose(scene.vertices + scene.origin, near.vertices + near.origin + far, rtol=0, atol=1e-6)
    assert scene.extent_m < 10


@pytest.mark.parametrize(
    ("size", "units", "said"),
    [(24_000.0, "m", 'with units = "m": is it in mm?'), (0.02, "m", "measures only"), (20.0, "m", None)],
)
def test_sizes_that_cannot_be(tmp_path: Path, size: float, units: str, said: str | None) -> None:
    scene = scene_of(tmp_path, {"a": box(0, 0, 0, size, size, size)}, units=units)
    assert bool(scene.doubts) == bool(said)
    if said:
        assert said in scene.doubts[0]


def test_health_counts_what_is_there(tmp_path: Path) -> None:
    vertices, polygons = box(0, 0, 0, 2, 2, 2)
    doubled = vertices, [*polygons, polygons[0]]
    scene, health = load_scene_and_health(
        make_study(tmp_path, {"a": doubled, "b": box(5, 0, 0, 7, 2, 2)}, [], [], SITE)
    )
    assert (health[0].triangles, health[0].doubles, health[0].crowded_edges) == (14, 2, 5)
    assert health[1].closed
    assert health[1].area_m2 == pytest.approx(24.0)
    assert health[1].size_m == pytest.approx((2, 2, 2))
    assert "2 triangles lie on others" in " ".join(scene.parts[0].doubts)


def test_repair_leaves_out_what_is_double_and_never_touches_the_file(tmp_path: Path) -> None:
    vertices, polygons = box(0, 0, 0, 2, 2, 2)
    sliver = np.array([(0, 0, 2.0), (2, 0, 2.0), (1, 0.0004, 2.0)])
    whole = np.concatenate([vertices, sliver]), [*polygons, polygons[0], (8, 9, 10)]
    study = make_study(tmp_path, {"a": whole}, [], [], SITE)
    before = (tmp_path / "model.obj").read_bytes()
    scene = load_scene(study, repair=True)
    assert len(scene.triangles) == 12
    assert any("2 triangles lying on others left out" in doubt for doubt in scene.doubts)
    assert any("1 slivers" in doubt for doubt in scene.doubts)
    assert (tmp_path / "model.obj").read_bytes() == before


def test_nothing_with_an_area_is_refused(tmp_path: Path, write_obj: Callable[[str, dict[str, Solid]], Path]) -> None:
    write_obj("model.obj", {"line": (np.array([(0, 0, 0), (1, 0, 0), (2, 0, 0)], dtype=float), [(0, 1, 2)])})
    study = Study(
        title="",
        site=SITE,
        models=(Model(file=Path("model.obj"), units="m"),),
        measures=(),
        periods=(),
        folder=tmp_path,
    )
    with pytest.raises(ModelError, match="holds no triangle with an area"):
        load_scene(study)
