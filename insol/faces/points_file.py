"""Reading named points from a table: name, x_m, y_m, z_m, azimuth_deg, tilt_deg."""

from __future__ import annotations

import csv
import io
import math
from pathlib import Path

import numpy as np

from insol.errors import MeasureError, did_you_mean, listed
from insol.faces.named_points import NamedPoints

COLUMNS = ("name", "x_m", "y_m", "z_m", "azimuth_deg", "tilt_deg")

LIMITS = {"azimuth_deg": (-360.0, 360.0), "tilt_deg": (0.0, 180.0)}
"""Columns that do not take every number, with the least and the greatest."""


def read_points(path: Path) -> NamedPoints:
    """Read a table of named points, comma-separated, in UTF-8, with the columns of COLUMNS in any order.

    Raises
    ------
    MeasureError
        The file cannot be read, a column is missing or unknown, a value is none, a name occurs twice, or
        there is no point in it.
    """
    lines = csv.reader(io.StringIO(text_of(path)), strict=True)
    try:
        rows = [(lines.line_num, row) for row in lines if any(cell.strip() for cell in row)]
    except csv.Error as fault:
        raise MeasureError(f"not a table: {fault}", where=f"{path}, line {lines.line_num}") from None
    if not rows:
        raise MeasureError("the file is empty", where=str(path), hint=f"its first line must be {','.join(COLUMNS)}")
    order = column_order(rows[0][1], where=f"{path}, line {rows[0][0]}")
    if len(rows) == 1:
        raise MeasureError("there is no point below the header", where=str(path))
    names: dict[str, int] = {}
    values = np.empty((len(rows) - 1, len(COLUMNS) - 1))
    for index, (line, row) in enumerate(rows[1:]):
        where = f"{path}, line {line}"
        cells = ordered_cells(row, order, where=where)
        values[index] = [number(cell, column, where=where) for cell, column in zip(cells[1:], COLUMNS[1:], strict=True)]
        add_name(names, cells[0], line, where=where)
    return NamedPoints(tuple(names), values[:, :3], values[:, 3], values[:, 4])


def text_of(path: Path) -> str:
    """The text of a file in UTF-8, with or without a byte order mark."""
    try:
        return path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        raise MeasureError(f"byte {fault.start + 1} is not UTF-8", where=str(path), hint="save it as UTF-8") from None
    except FileNotFoundError:
        raise MeasureError("there is no such file", where=str(path)) from None
    except OSError as fault:
        raise MeasureError(f"cannot be read: {fault.strerror or fault}", where=str(path)) from None


def column_order(header: list[str], *, where: str) -> list[int]:
    """Where in a row each of COLUMNS stands."""
    found = [cell.strip() for cell in header]
    if len(found) == 1 and ";" in found[0]:
        raise MeasureError("the columns are parted by semicolons", where=where, hint="part them by commas")
    for name in found:
        if name not in COLUMNS:
            near = did_you_mean(name, COLUMNS)
            raise MeasureError(f'unknown column "{name}"; allowed: {listed(COLUMNS)}', where=where, hint=near)
        if found.count(name) > 1:
            raise MeasureError(f'the column "{name}" is there twice', where=where)
    missing = [name for name in COLUMNS if name not in found]
    if missing:
        raise MeasureError(f"missing columns: {listed(missing)}; needed: {listed(COLUMNS)}", where=where)
    return [found.index(name) for name in COLUMNS]


def ordered_cells(row: list[str], order: list[int], *, where: str) -> list[str]:
    """A row's cells in the order of COLUMNS."""
    if len(row) != len(order):
        hint = "write decimals with a point" if len(row) > len(order) else ""
        raise MeasureError(f"{len(row)} values, but the header has {len(order)} columns", where=where, hint=hint)
    return [row[place].strip() for place in order]


def number(cell: str, column: str, *, where: str) -> float:
    """The number in a cell."""
    where = f"{where}, column {column}"
    try:
        value = math.nan if "_" in cell else float(cell)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        hint = "write decimals with a point" if "," in cell else ""
        raise MeasureError(f'"{cell}" is not a number' if cell else "a number is missing", where=where, hint=hint)
    low, high = LIMITS.get(column, (-math.inf, math.inf))
    if not low <= value <= high:
        raise MeasureError(f"{cell} is not within {low:g} to {high:g} degrees", where=where)
    return value


def add_name(names: dict[str, int], name: str, line: int, *, where: str) -> None:
    """Note a point's name and its line, when it has a name of its own."""
    where = f"{where}, column name"
    if not name:
        raise MeasureError("the point has no name", where=where)
    if name in names:
        raise MeasureError(f'"{name}" is already the name of the point in line {names[name]}', where=where)
    names[name] = line
