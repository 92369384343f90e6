"""Data behind pictures: read back, it is what went in."""

from __future__ import annotations

import csv

import numpy as np

from app.figures.export_data import write_csv


def tables(text: str) -> dict[str, list[list[str]]]:
    blocks = [block.split("\n", 1) for block in text.strip("\n").split("\n\n")]
    return {title.removeprefix("# "): list(csv.reader(body.splitlines())) for title, body in blocks}


def column(table: list[list[str]], header: str) -> np.ndarray:
    place = table[0].index(header)
    return np.array([float(row[place]) for row in table[1:] if row[place]])


def test_curves_come_back_in_full_precision_with_names_and_units(a_profile):
    picture = a_profile(1.1)
    table = tables(write_csv([picture]))[picture.title]
    for curve in picture.curves:
        np.testing.assert_array_equal(column(table, f"{curve.name}: position x [µm]"), curve.x)
        np.testing.assert_array_equal(column(table, f"{curve.name}: density n [1/cm^3]"), curve.y)


def test_breaks_marks_outlines_and_the_field_come_back_too(a_map):
    picture = a_map(1.3)
    found = tables(write_csv([picture]))
    curves, cells = found[picture.title], found[f"{picture.title}: phase-space density"]
    decades, cloud = picture.curves[0], picture.marks[0]
    np.testing.assert_array_equal(column(curves, "decades: temperature T [K]"), decades.y)
    assert column(curves, "cloud: atoms N").tolist() == [cloud.x]
    np.testing.assert_array_equal(column(curves, "uncertainty: temperature T [K]"), cloud.outline.y)
    assert cells[0] == ["atoms N", "temperature T [K]", "place on colour scale"]
    values = np.array(cells[1:], dtype=float)
    np.testing.assert_array_equal(values[:, 2].reshape(picture.field.shade.shape), picture.field.shade)
    np.testing.assert_array_equal(values[:100, 0], picture.field.x)


def test_several_pictures_follow_one_another(a_profile, a_slice):
    assert list(tables(write_csv([a_profile(1.0), a_slice(1.0)]))) == [a_profile(1.0).title, a_slice(1.0).title]
