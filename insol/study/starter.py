"""A starter study for models: what the files tell is written down, what they cannot tell is left to be filled in.

A mesh file says nothing of its unit, and nothing of the place on earth. Those keys stand there behind
a #, with what is likely, and a study is refused until someone has confirmed them.
"""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from insol.conventions import METRES_PER_UNIT
from insol.errors import printable
from insol.study.description import Role, Units, Up
from insol.study.place import cut
from insol.study.writing import toml_value

Triple = tuple[float, float, float]

LIKELIEST_FIRST: tuple[Units, ...] = ("m", "mm", "ft", "cm", "in")
"""Of the units in which a model is as large as buildings are."""

MOST_FACES = 200_000
"""A first run should take seconds."""

ROUND_SPACINGS_M = (0.5, 1.0, 2.0, 5.0, 10.0)
MOST_NAMES_SHOWN = 12
WIDEST_GROUND_M = 5_000.0
"""Models that lie farther apart are no one place; the ground is then that around the first."""

MARGIN_M = 10.0
"""The proposed ground reaches so far beyond the model that it surrounds."""

ROLE_WORDS: tuple[tuple[Role, tuple[str, ...]], ...] = (
    ("proposed", ("propos", "option", "design", "new")),
    ("existing", ("exist", "before", "demol")),
    ("ground", ("ground", "terrain")),
)
"""What file names say of a model's role."""


@dataclass(frozen=True, kw_only=True)
class ModelFacts:
    """What a mesh file tells, in its own unit and axes."""

    file: str  # as the study names it
    triangle_count: int
    part_names: tuple[str, ...]
    low: Triple
    high: Triple
    area: float  # of all triangles
    plausible_units: tuple[Units, ...] = ()  # in which it is as large as buildings are
    likely_up: Up | None = None  # the axis that points up, where walls or bases tell


@dataclass(frozen=True, kw_only=True)
class Known:
    """What is known of the rest; None where it has to be filled in."""

    year: int
    title: str = ""
    latitude: float | None = None
    longitude: float | None = None
    time_zone: str | None = None
    elevation_m: float = 0.0
    north_deg: float = 0.0
    units: Units | None = None
    up: Up | None = None


@dataclass(frozen=True)
class Placed:
    """A model as it would lie in metres with z up, were its likely unit and axis right."""

    facts: ModelFacts
    role: Role
    up: Up
    likely_units: tuple[Units, ...]
    low: Triple
    high: Triple
    area_m2: float


def starter_study(models: Sequence[ModelFacts], known: Known) -> str:
    """The text of a study for models, with notes; `load_study` says what is still to be filled in."""
    placed = [placed_model(facts, known) for facts in models]
    title = known.title or ", ".join(facts.file.rsplit("/", 1)[-1].rsplit(".", 1)[0] for facts in models)[:200]
    blocks = [
        "# A study for insol. A line that begins with # is a note, or a key that is not in force.\n"
        "# Fill in the keys marked FILL IN and CONFIRM, and take away the # before them.",
        f"title = {toml_value(printable(title))}",
        site_block(known),
        *(model_block(model, known) for model in placed),
        faces_block(placed),
        ground_block(placed, known),
        *period_blocks(known),
    ]
    return "\n\n".join(blocks) + "\n"


def placed_model(facts: ModelFacts, known: Known) -> Placed:
    """A model in metres with z up, by what is known or else likely."""
    up = known.up or facts.likely_up or "z"
    plausible = [known.units] if known.units else facts.plausible_units
    likely = tuple(unit for unit in LIKELIEST_FIRST if unit in plausible)
    scale = METRES_PER_UNIT[likely[0]] if likely else 1.0
    low, high = standing(facts, up)
    return Placed(
        facts=facts, role=role_of(facts.file), up=up, likely_units=likely,
        low=(low[0] * scale, low[1] * scale, low[2] * scale), high=(high[0] * scale, high[1] * scale, high[2] * scale),
        area_m2=facts.area * scale**2,
    )  # fmt: skip


def standing(facts: ModelFacts, up: Up) -> tuple[Triple, Triple]:
    """The box around a model, in its own unit, once its up axis points along z."""
    (x, y, z), (far_x, far_y, far_z) = facts.low, facts.high
    return (facts.low, facts.high) if up == "z" else ((x, -far_z, y), (far_x, -z, far_y))


def role_of(file: str) -> Role:
    """The role that a file's name speaks of."""
    name = file.replace("\\", "/").rsplit("/", 1)[-1].casefold()
    return next((role for role, words in ROLE_WORDS if any(word in name for word in words)), "surroundings")


def site_block(known: Known) -> str:
    """The site, with what is not known left to be filled in."""
    rows = [
        ("latitude", known.latitude, "53.41", "degrees, north positive"),
        ("longitude", known.longitude, "-2.99", "degrees, east positive"),
        ("time_zone", known.time_zone, '"Europe/London"', 'an IANA name, or an offset from UTC such as "+05:30"'),
    ]
    lines = ["[site]"]
    for name, value, example, meaning in rows:
        given = value is not None
        lines.append(noted(f"{name} = {toml_value(value)}" if given else f"# {name} = {example}",
                           meaning if given else f"FILL IN: {meaning}"))  # fmt: skip
    lines.append(noted(f"elevation_m = {known.elevation_m:g}", "above sea level"))
    lines.append(noted(f"north_deg = {known.north_deg:g}", "bearing of the model's +y axis, clockwise from true north"))
    return "\n".join(lines)


def model_block(model: Placed, known: Known) -> str:
    """One model, with its size in every unit that it might be in."""
    facts = model.facts
    about = textwrap.wrap(parts_in_words(facts), 100, initial_indent="# ", subsequent_indent="#   ")
    lines = ["[[model]]", *about, f"file = {toml_value(facts.file)}"]
    if known.units:
        lines.append(f"units = {toml_value(known.units)}")
    else:
        lines.append("# The file does not say its unit. It would be, along its own x, y and z:")
        lines += [f"#   {unit:<3} {size_in(facts, unit)}{likelihood(unit, model)}" for unit in METRES_PER_UNIT]
        proposal = model.likely_units[0] if model.likely_units else ""
        lines.append(noted(f"# units = {toml_value(proposal)}", "CONFIRM: mm, cm, m, in or ft"))
    reason = "" if known.up else "; so its walls or bases say" if facts.likely_up else "; CONFIRM"
    lines.append(noted(f"up = {toml_value(model.up)}", f"the axis that points up, z or y{reason}"))
    lines.append(noted(f"role = {toml_value(model.role)}", "surroundings, existing, proposed or ground"))
    return "\n".join(lines)


def parts_in_words(facts: ModelFacts) -> str:
    """How much is in a file, and the first names of its parts."""
    names = [cut(printable(name)) for name in facts.part_names]
    more = f" and {len(names) - MOST_NAMES_SHOWN:,} more" if len(names) > MOST_NAMES_SHOWN else ""
    what = "1 part" if len(names) == 1 else f"{len(names):,} parts"
    return f"{facts.triangle_count:,} triangles in {what}: {', '.join(names[:MOST_NAMES_SHOWN])}{more}"


def likelihood(unit: str, model: Placed) -> str:
    """A mark beside the units that are likely."""
    return "" if unit not in model.likely_units else "  <- likely" if unit == model.likely_units[0] else "  possible"


def size_in(facts: ModelFacts, unit: str) -> str:
    """The extents of a model in metres, were it drawn in this unit."""
    lengths = [(high - low) * METRES_PER_UNIT[unit] for low, high in zip(facts.low, facts.high, strict=True)]
    return " x ".join(f"{length:,.0f}" if length >= 100 else f"{length:.3g}" for length in lengths) + " m"


def faces_block(placed: Sequence[Placed]) -> str:
    """The faces of what is proposed, or of all parts where nothing is."""
    proposed = [model for model in placed if model.role == "proposed"]
    chosen = 'roles = ["proposed"]' if proposed else 'parts = ["*"]'
    note = 'or by names: parts = ["block-*"]' if proposed else "patterns on the parts' names; * is all of them"
    spacing = round_spacing(sum(model.area_m2 for model in proposed or placed))
    return "\n".join([
        "[[measure]]",
        'name = "facades"',
        'kind = "faces"',
        noted(chosen, note),
        noted(f"spacing_m = {spacing:g}", 'no face is wider; or "as-modelled": the polygons of the file'),
    ])  # fmt: skip


def ground_block(placed: Sequence[Placed], known: Known) -> str:
    """A grid on the ground: over the model of the ground, or level around the buildings."""
    lines = ["[[measure]]", 'name = "ground"', 'kind = "ground"']
    ground = [model for model in placed if model.role == "ground"]
    if ground:
        names = list(ground[0].facts.part_names[:MOST_NAMES_SHOWN])
        spacing = round_spacing(sum(model.area_m2 for model in ground))
        return "\n".join([*lines, f"parts = {toml_value(names)}", f"spacing_m = {spacing:g}"])
    around = [model for model in placed if model.role == "proposed"] or list(placed)
    west, south, east, north = plan_around(around)
    if max(east - west, north - south) > WIDEST_GROUND_M:
        west, south, east, north = plan_around(around[:1])
    level = min(model.low[2] for model in around)
    corners = f"[[{west}, {south}], [{east}, {south}], [{east}, {north}], [{west}, {north}]]"
    unit = around[0].likely_units[0] if around[0].likely_units else "m"
    note = "x and y in metres" + ("" if known.units else f", right if the unit is {unit}")
    lines += [noted(f"polygon = {corners}", note), noted(f"height_m = {level:.3f}", "the level of the grid, its z")]
    lines.append(f"spacing_m = {round_spacing(float((east - west) * (north - south))):g}")
    return "\n".join(lines)


def plan_around(models: Sequence[Placed]) -> tuple[int, int, int, int]:
    """West, south, east and north end of the ground around models, in whole metres."""
    west, south = (math.floor(min(model.low[axis] for model in models) - MARGIN_M) for axis in (0, 1))
    east, north = (math.ceil(max(model.high[axis] for model in models) + MARGIN_M) for axis in (0, 1))
    return west, south, east, north


def round_spacing(area_m2: float) -> float:
    """The smallest round spacing, from 1 m up, that cuts an area into no more faces than a first run likes."""
    fits = (spacing for spacing in ROUND_SPACINGS_M if spacing >= 1.0 and area_m2 / spacing**2 <= MOST_FACES)
    return next(fits, ROUND_SPACINGS_M[-1])


def period_blocks(known: Known) -> Iterable[str]:
    """An equinox and a solstice, each to the second; the year is there for who wants it."""
    for days in ("march-equinox", "december-solstice"):
        yield "\n".join([
            "[[period]]",
            f'name = "{days}"',
            noted(f'days = "{days}"', 'or one day, "03-21"; from one to another, "10-01/03-31"; "year"'),
            f"year = {known.year}",
            noted('clock = "local"', "local, standard or solar"),
        ])  # fmt: skip
    yield "\n".join(["# [[period]]", '# name = "year"', '# days = "year"', f"# year = {known.year}"])


def noted(setting: str, note: str) -> str:
    """A line with its note beside it."""
    return f"{setting:<34}  # {note}"
