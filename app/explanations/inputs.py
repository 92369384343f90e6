"""The numbers that go in, each with the text it came from: the plan's, the data's, constants."""

from __future__ import annotations

import numpy as np

from app.choices import PLAN_FIELDS
from app.explanations.explanation import Input, Origin
from app.explanations.sheet import Sheet, once
from app.explanations.terms import Leaf
from app.units import Quantity, format_quantity
from physics.constants import boltzmann, planck, reduced_planck
from physics.equilibria import INTERACTION_COEFFICIENT
from physics.losses import FLIP_COEFFICIENTS
from physics.statistics import zeta

_CODATA = "CODATA 2022"
LOWERED = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_ZETA = "Riemann zeta function, DLMF 25.2"


def _typed(sheet: Sheet, symbol: str, meaning: str, quantity: Quantity, unit: str) -> Leaf:
    return sheet.enter(
        Input(symbol=symbol, meaning=meaning, text=quantity.text, value=quantity.value, unit=unit, origin=Origin.TYPED)
    )


def constant(sheet: Sheet, symbol: str, meaning: str, value: float, unit: str, source: str) -> Leaf:
    """A number that is the same for every cloud."""
    text = format_quantity(value, digits=10)
    return sheet.enter(
        Input(
            symbol=symbol, meaning=meaning, text=f"{text} {unit}" if unit != "1" else text, value=value, unit=unit,
            origin=Origin.CONSTANT, source=source,
        )
    )  # fmt: skip


@once
def atoms(sheet: Sheet) -> Leaf:
    return _typed(sheet, "N", "atom number of one spin state", sheet.answer.plan.cloud.atoms, "1")


@once
def temperature(sheet: Sheet) -> Leaf:
    return _typed(sheet, "T", "temperature", sheet.answer.plan.cloud.temperature, "K")


@once
def frequencies(sheet: Sheet) -> tuple[Leaf, Leaf, Leaf]:
    typed = sheet.answer.plan.trap.frequencies
    first, second, third = (
        _typed(sheet, symbol, meaning, typed[axis], "Hz")
        if typed is not None
        else _surveyed(sheet, symbol, meaning, float(sheet.answer.cloud.trap.frequencies[axis]), "Hz", "Hz")
        for axis, (symbol, meaning) in enumerate(
            (f"f{mark}", f"trap frequency along axis {axis}") for axis, mark in enumerate("₁₂₃", start=1)
        )
    )
    return first, second, third


@once
def depth(sheet: Sheet) -> Leaf:
    typed, used = sheet.answer.plan.trap.depth, sheet.answer.cloud.trap.depth
    if typed is not None:
        return _typed(sheet, "U", "trap depth", typed, "J")
    if used is None:
        raise ValueError("the plan has no trap depth")
    return _surveyed(sheet, "U", "trap depth", float(used), "µK", "J")


@once
def highest_energy(sheet: Sheet) -> Leaf:
    """epsilon_t of a real trap."""
    solved = sheet.answer.real_trap
    assert solved is not None
    return _surveyed(sheet, "ε_t", "highest energy that the trap holds", float(solved.trap.held), "µK", "J")


@once
def volume_at_highest_energy(sheet: Sheet) -> Leaf:
    solved = sheet.answer.real_trap
    assert solved is not None
    meaning = "volume of the trap below that energy, where its volume curve ends"
    return _surveyed(sheet, "W(ε_t)", meaning, float(solved.trap.volume), "m^3", "m^3")


def _surveyed(sheet: Sheet, symbol: str, meaning: str, value: float, shown: str, unit: str) -> Leaf:
    """A number of the trap that beams and coils make."""
    text = format_quantity(value, shown, digits=6, si_unit="" if unit == "1" else unit)
    return sheet.enter(
        Input(
            symbol=symbol, meaning=meaning, text=text, value=value, unit=unit, origin=Origin.TRAP,
            source=sheet.answer.plan.trap.makers,
        )
    )  # fmt: skip


@once
def efficiency(sheet: Sheet) -> Leaf:
    quantity = sheet.answer.plan.target.efficiency
    if quantity is None:
        raise ValueError("the plan has no evaporation efficiency")
    return _typed(sheet, "γ", "assumed efficiency of evaporation, −d ln D/d ln N", quantity, "1")


@once
def mass(sheet: Sheet) -> Leaf:
    known = sheet.answer.state.isotope.mass
    return sheet.enter(
        Input(
            symbol="m", meaning=f"mass of {sheet.answer.state.key}", text=known.text, value=known.value, unit="kg",
            origin=Origin.DATA, source=known.source, certainty=known.certainty,
        )
    )  # fmt: skip


@once
def scattering_length(sheet: Sheet) -> Leaf | None:
    """a, or None where it is not known."""
    answer = sheet.answer
    typed, used = answer.plan.species.scattering_length, answer.scattering
    meaning = "scattering length" if sheet.bosons else "scattering length between the spin states"
    if typed is not None:
        return _typed(sheet, "a", meaning, typed, "m")
    if used.value is None:
        return None
    field, stated = answer.plan.species.field, answer.state.scattering_length
    text = format_quantity(used.value, "a0", digits=6)
    if used.from_resonances and field is not None:
        text, meaning = f"{text} at {field.text}", f"{meaning}, from the resonances"
    elif stated is not None:
        text = stated.text
    return sheet.enter(
        Input(
            symbol="a", meaning=meaning, text=text, value=used.value, unit="m", origin=Origin.DATA, source=used.source,
            certainty=used.certainty,
        )
    )  # fmt: skip


@once
def dipolar_length(sheet: Sheet) -> Leaf | None:
    """a_dd, or None where collisions of dipoles are left out."""
    length, moment = sheet.answer.cloud.dipolar_length, sheet.answer.state.magnetic_moment
    if length is None:
        return None
    return sheet.enter(
        Input(
            symbol="a_dd", meaning="dipolar length, µ₀ µ² m/(12 π ħ²)", text=format_quantity(length, "a0", digits=6),
            value=float(length), unit="m", origin=Origin.DATA, source=moment.source if moment else "",
            certainty=moment.certainty if moment else None,
        )
    )  # fmt: skip


_LOSSES = {
    "background_lifetime": ("τ_bg", "1/e lifetime by collisions with the background gas", "s"),
    "two_body": ("K₂", "two-body rate constant of a thermal gas", "m^3/s"),
    "three_body": ("K₃", "three-body rate constant of a thermal gas", "m^6/s"),
    "heating": ("Ṫ_given", "heating that does not depend on density", "K/s"),
    "intensity_noise": ("S", "relative intensity noise of the light, at 2f", "1/Hz"),
    "pointing_noise": ("S_x", "noise of the trap's position along each axis, at f", "m^2/Hz"),
}


def loss(sheet: Sheet, name: str) -> Leaf:
    """A number that says how atoms are lost or heated, typed or from the data."""
    if name not in sheet.made:
        sheet.made[name] = _loss(sheet, name)
    leaf = sheet.made[name]
    assert isinstance(leaf, Leaf)
    return leaf


def _loss(sheet: Sheet, name: str) -> Leaf:
    symbol, meaning, unit = _LOSSES[name]
    typed, used = getattr(sheet.answer.plan.losses, name), sheet.answer.losses
    if typed is not None:
        return _typed(sheet, symbol, meaning, typed, unit)
    known = {"two_body": used.two_body, "three_body": used.three_body}.get(name)
    if known is None:
        raise ValueError(f"neither plan nor data have a {name.replace('_', ' ')}")
    return sheet.enter(
        Input(
            symbol=symbol, meaning=meaning, text=known.text, value=known.value, unit=unit, origin=Origin.DATA,
            source=known.source, certainty=known.certainty,
        )
    )  # fmt: skip


@once
def zero_force(sheet: Sheet) -> Leaf:
    """Force of the field on its strong axis, at its zero."""
    value = float(sheet.answer.losses.losses.zero_force)
    return _surveyed(sheet, "F", "force of the field on its strong axis", value, "N", "N")


@once
def light_shares(sheet: Sheet) -> tuple[Leaf, ...]:
    """Share of each spring constant that the light makes; none where it makes all of it."""
    shares = sheet.answer.losses.losses.light_shares
    if shares is None or bool(np.all(np.abs(shares - 1.0) < 1e-9)):
        return ()
    return tuple(
        _surveyed(
            sheet, f"s{mark}", f"share of the stiffness along axis {axis} that the light makes", float(share), "1", "1"
        )
        for axis, (mark, share) in enumerate(zip("₁₂₃", shares, strict=True), start=1)
    )


def scattering(sheet: Sheet) -> list[tuple[Leaf, Leaf]]:
    """Of each beam that shines: its wavelength, and the photons that an atom at the minimum scatters of it."""
    from app.answers.trap import trap_answer

    plan, found = sheet.answer.plan, []
    for place, (name, rate) in enumerate(trap_answer(plan).survey.heating.scattering_rates.items(), start=1):
        mark = str(place).translate(LOWERED)
        wavelength = _typed(sheet, f"λ{mark}", f"wavelength of beam {name}", plan.trap.beam(name).wavelength, "m")
        photons = _surveyed(sheet, f"Γ{mark}", f"photons of beam {name} scattered at the minimum", rate, "1/s", "1/s")
        found.append((wavelength, photons))
    return found


@once
def flip_coefficient(sheet: Sheet) -> Leaf:
    low, high = FLIP_COEFFICIENTS
    meaning = f"geometric mean of the factors quoted, {low} and {high}"
    return constant(sheet, "χ", meaning, (low * high) ** 0.5, "1", "Petrich et al., PRL 74, 3352 (1995), recalled")


@once
def spin_states(sheet: Sheet) -> Leaf:
    count, typed = sheet.answer.cloud.spin_components, sheet.answer.plan.species.spin_components
    return sheet.enter(
        Input(
            symbol="s", meaning="equally filled spin states", text=str(count), value=float(count), unit="1",
            origin=Origin.TYPED if typed is not None else Origin.DATA,
            source="" if typed is not None else f"the state {sheet.answer.state.name}",
        )
    )  # fmt: skip


@once
def fermi_threshold(sheet: Sheet) -> Leaf:
    typed, meaning = sheet.answer.plan.target.reduced_temperature, "T/TF that counts as the threshold"
    if typed is not None:
        return _typed(sheet, "t", meaning, typed, "1")
    value = sheet.answer.threshold
    field = PLAN_FIELDS["target.reduced_temperature"]
    return sheet.enter(
        Input(
            symbol="t", meaning=meaning, text=f"{value:g}", value=value, unit="1", origin=Origin.ASSUMED,
            source=f'"{field.label}" is not given',
        )
    )  # fmt: skip


@once
def h(sheet: Sheet) -> Leaf:
    return constant(sheet, "h", "Planck constant", planck, "J s", f"{_CODATA}, exact")


@once
def hbar(sheet: Sheet) -> Leaf:
    return constant(sheet, "ħ", "reduced Planck constant, h/2π", reduced_planck, "J s", f"{_CODATA}, exact")


@once
def k(sheet: Sheet) -> Leaf:
    return constant(sheet, "k", "Boltzmann constant", boltzmann, "J/K", f"{_CODATA}, exact")


@once
def zeta_2(sheet: Sheet) -> Leaf:
    return constant(sheet, "ζ(2)", "zeta function at 2, π²/6", zeta(2.0), "1", _ZETA)


@once
def zeta_3(sheet: Sheet) -> Leaf:
    return constant(sheet, "ζ(3)", "g₃(1): all that excited levels hold", zeta(3.0), "1", _ZETA)


@once
def zeta_3_2(sheet: Sheet) -> Leaf:
    return constant(sheet, "ζ(3/2)", "g_3/2(1): the largest n λ³ of thermal bosons", zeta(1.5), "1", _ZETA)


@once
def interaction_coefficient(sheet: Sheet) -> Leaf:
    source = "Giorgini, Pitaevskii, Stringari, Phys. Rev. A 54, R4633 (1996)"
    return constant(sheet, "c₂", "coefficient of the interaction shift", INTERACTION_COEFFICIENT, "1", source)
