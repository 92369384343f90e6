"""Units and kinds of quantities: sizes, the registry, and what each kind offers."""

from __future__ import annotations

import subprocess
import sys

import pytest

import app.kinds
from app.kinds import EVERYDAY, STAND_INS
from app.unit_text import _registry, _resolve
from app.units import (
    Kind,
    QuantityError,
    factor,
    read_quantity,
)
from physics import constants

KINDS = tuple(kind for kind in vars(app.kinds).values() if isinstance(kind, Kind))
h, k = constants.planck, constants.boltzmann


def test_everyday_units_agree_with_the_registry() -> None:
    for unit, (size, si_unit) in EVERYDAY.items():
        if unit == "%":  # not a unit of the registry
            assert float(size) == 0.01
            continue
        exact, dimension = _resolve(unit)
        assert float(size) == float(exact), unit
        assert dimension == _resolve(si_unit)[1], unit
        assert _resolve(si_unit)[0] == 1, si_unit


@pytest.mark.parametrize(
    ("unit", "value"),
    [
        ("a0", constants.bohr_radius),
        ("u", constants.atomic_mass),
        ("amu", constants.atomic_mass),
        ("muB", constants.bohr_magneton),
        ("µB", constants.bohr_magneton),
        ("eV", constants.elementary_charge),
        ("au", constants.polarizability_atomic_unit),
        ("kg", 1.0),
        ("G/cm", 1e-2),
        ("cm^6/s", 1e-12),
        ("cm⁻³", 1e6),
        ("1/Hz", 1.0),
        ("um", 1e-6),
        ("min", 60.0),
    ],
)
def test_units_of_the_trade(unit: str, value: float) -> None:
    assert factor(unit) == value


def test_the_registry_knows_the_trade_and_nothing_else() -> None:
    for unit in ("byte", "B", "parsec", "rpm", "rad", "degC", "bit", "foot"):
        assert not _registry().parse_unit_name(unit), unit
        with pytest.raises(QuantityError, match="is not a unit that is known here"):
            factor(unit)
    assert dict(_registry().parse_units("Hz").dimensionality) != dict(_registry().parse_units("1/s").dimensionality)


def test_stand_ins_are_the_constants() -> None:
    assert factor("J", "K") == pytest.approx(1 / k, rel=1e-15)
    assert factor("Hz", "K") == pytest.approx(h / k, rel=1e-15)
    assert factor("kHz", "J") == pytest.approx(1e3 * h, rel=1e-15)
    assert factor("µK/s", "J/s") / k == pytest.approx(1e-6, rel=1e-15, abs=0.0)
    assert factor("kHz/s", "J/s") / h == pytest.approx(1e3, rel=1e-15)
    assert set(STAND_INS) == {"K", "J", "J/s"}
    with pytest.raises(QuantityError, match='"nK" is not a unit of a quantity in "Hz"'):
        factor("nK", "Hz")


def test_neither_import_nor_usual_input_loads_pint_or_numpy() -> None:
    program = (
        "import sys, app.units as u\n"
        "u.read_quantity('1.20(5) uK', u.TEMPERATURE); u.read_quantity('2pi x 120 Hz', u.FREQUENCY)\n"
        "u.format_quantity(1e-7, 'nK'); u.best_unit(1e-7, ('nK', 'µK'))\n"
        "print([m for m in ('pint', 'numpy', 'scipy', 'PySide6') if m in sys.modules])\n"
    )
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_a_kind_must_make_sense() -> None:
    with pytest.raises(ValueError, match="must run from a low to a high bound, got 2 to 1"):
        Kind(name="x", si_unit="K", units=("K",), low=2, high=1, example="1 K")
    with pytest.raises(ValueError, match="must offer a unit"):
        Kind(name="x", si_unit="K", units=(), low=1, high=2, example="1 K")


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
def test_every_kind_reads_its_example_and_every_unit_it_offers(kind: Kind) -> None:
    read_quantity(kind.example, kind)
    for unit in kind.units:
        assert factor(unit, kind.si_unit) > 0
