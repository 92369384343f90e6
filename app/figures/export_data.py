"""The data behind pictures as CSV text: full precision, headers with name and unit."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from itertools import zip_longest

import numpy as np

from app.figures.picture import Array, Axis, Curve, Field, Picture


def write_csv(pictures: Sequence[Picture]) -> str:
    """Curves, marks and colour field of each picture as CSV tables, one after the other.

    A table starts with the picture's title behind "# " and ends with an empty line. Curves and marks have a column
    each for x and y, shorter ones end in empty cells, and NaN is written where a curve is broken. A field has one row
    a cell: x, y and the place on its colour scale (0 to 1).
    """
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    tables = [table for picture in pictures for table in _tables(picture)]
    for i, (title, rows) in enumerate(tables):
        if i:
            text.write("\n")
        text.write(f"# {' '.join(title.split())}\n")
        writer.writerows(rows)
    return text.getvalue()


def _tables(picture: Picture) -> Iterable[tuple[str, Iterable[Sequence[str]]]]:
    columns = [column for curve in _all_curves(picture) for column in _columns(picture, curve)]
    if columns:
        yield picture.title, zip_longest(*columns, fillvalue="")
    if picture.field is not None:
        yield f"{picture.title}: {picture.field.bar_label}", _cells(picture, picture.field)


def _all_curves(picture: Picture) -> Iterable[Curve]:
    yield from picture.curves
    for mark in picture.marks:
        yield Curve(name=mark.name, role=mark.role, x=np.array([mark.x]), y=np.array([mark.y]))
        if mark.outline is not None:
            yield mark.outline


def _columns(picture: Picture, curve: Curve) -> Iterable[list[str]]:
    name = curve.name or curve.role.name.lower().replace("_", " ")
    yield [_header(picture.x, name), *_numbers(curve.x)]
    yield [_header(picture.y, name), *_numbers(curve.y)]


def _cells(picture: Picture, field: Field) -> Iterable[Sequence[str]]:
    yield [_header(picture.x), _header(picture.y), "place on colour scale"]
    for y, row in zip(_numbers(field.y), field.shade, strict=True):
        for x, shade in zip(_numbers(field.x), _numbers(row), strict=True):
            yield [x, y, shade]


def _header(axis: Axis, name: str = "") -> str:
    title = f"{axis.label} [{axis.unit}]" if axis.unit else axis.label
    return f"{name}: {title}" if name else title


def _numbers(values: Array) -> list[str]:
    return [repr(float(value)) for value in values]
