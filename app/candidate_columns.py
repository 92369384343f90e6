"""The columns in which species are compared.

Every quantity of a cloud that is one number is one, and so is what only a comparison asks: of the trap, the tuning and
the evaporation. A column's texts are a row of the table of quantities; those of the cloud are the very rows of
`app.quantities`, the others are here.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum, auto
from types import MappingProxyType

from app.quantities import QUANTITIES
from app.quantity_row import Group, Need, Row

_CHIN = "Chin, Grimm, Julienne, Tiesinga, Rev. Mod. Phys. 82, 1225 (2010)"
_GRIMM = "Grimm, Weidemueller, Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000)"
_LUITEN = "Luiten, Reynolds, Walraven, Phys. Rev. A 53, 381 (1996)"
_BAGNATO = "Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987)"
_WEBER = "Weber et al., Phys. Rev. Lett. 91, 123201 (2003)"
_BUTTS = "Butts, Rokhsar, Phys. Rev. A 55, 4346 (1997)"


class Part(Enum):
    """What of a candidate a column is about."""

    CLOUD = auto()
    THRESHOLD = auto()
    SPECIES = auto()
    LENGTH = auto()
    FIELD = auto()
    CEILING = auto()
    TUNING = auto()
    TRAP = auto()
    EVAPORATION = auto()


class Datum(Enum):
    """Data on which a column rests, apart from the mass; the text names them in a sentence."""

    LENGTH = "the scattering length"
    RESONANCES = "the resonances"
    TWO_BODY = "the two-body constant"
    THREE_BODY = "the three-body constant"
    TRAP = "what light and coils do to the atoms"


@dataclass(frozen=True, kw_only=True)
class Column:
    """A column.

    row : its name, label, units, formula and source
    part : what it is about
    data : on which it rests
    more_is_better : how a weight counts it at first
    """

    row: Row
    part: Part
    data: frozenset[Datum]
    more_is_better: bool = True

    @property
    def name(self) -> str:
        return self.row.name


_OF_NEED = MappingProxyType(
    {
        Need.INTERACTING_CONDENSATE: (Datum.LENGTH,),
        Need.SCATTERING_LENGTH: (Datum.LENGTH,),
        Need.COLLISIONS: (Datum.LENGTH,),
        Need.REPULSIVE: (Datum.LENGTH,),
        Need.ATTRACTIVE: (Datum.LENGTH,),
        Need.STABLE_CONDENSATE: (Datum.LENGTH,),
        Need.DIPOLES: (Datum.LENGTH,),
        Need.COLLIDING: (Datum.LENGTH,),
        Need.MIXTURE: (Datum.LENGTH,),
        Need.TWO_BODY: (Datum.TWO_BODY,),
        Need.THREE_BODY: (Datum.THREE_BODY,),
        Need.LOSSES: (Datum.TWO_BODY, Datum.THREE_BODY),
        Need.HEATING: (Datum.TWO_BODY, Datum.THREE_BODY),
    }
)
_OFF_THE_TRAP = frozenset(
    {
        "thermal_wavelength",
        "collision_cross_section",
        "background_lifetime",
        "pair_binding_energy",
        "three_body_ceiling",
    }
)
"""Quantities of a cloud into which the trap does not enter."""

_LESS_IS_BETTER = frozenset(
    {
        "reduced_temperature",
        "atoms_to_threshold",
        "rethermalisation_time",
        "loss_per_rethermalisation",
        "heating_rate",
        "loss_heating_rate",
        "light_scattering_rate",
        "recoil_heating_rate",
        "sag",
        "evaporation_time",
    }
)


def _own(part: Part, *data: Datum, needs: tuple[Need, ...] = (), **texts: object) -> Column:
    row = Row(needs=needs, **texts)  # type: ignore[arg-type]  # the keywords of Row
    return Column(row=row, part=part, data=frozenset(data), more_is_better=row.name not in _LESS_IS_BETTER)


_OWN = (
    _own(
        Part.THRESHOLD,
        Datum.TRAP,
        name="threshold_temperature",
        label="threshold temperature",
        symbol="Tθ",
        unit="K",
        units=("nK", "µK", "K"),
        group=Group.THRESHOLD,
        formula="at this N: Tc of bosons; of fermions the T/TF of the target, else 0.5, times TF",
        source=f"{_BAGNATO}; {_BUTTS}",
        validity="ideal gas, large clouds",
    ),
    _own(
        Part.SPECIES,
        name="mass",
        label="mass",
        symbol="m",
        unit="kg",
        units=("u", "kg"),
        group=Group.CLOUD,
        formula="of one atom",
        source="as the data of the species say",
        validity="exact",
    ),
    _own(
        Part.LENGTH,
        Datum.LENGTH,
        name="scattering_length",
        label="scattering length",
        symbol="a",
        unit="m",
        units=("a0", "nm"),
        group=Group.COLLISIONS,
        formula="of the state with itself, of a mixture between its spin states; tuned where a field is given",
        source="as the data of the species say",
        validity="s-waves",
    ),
    _own(
        Part.FIELD,
        name="magnetic_field",
        label="magnetic field",
        symbol="B",
        unit="T",
        units=("G", "mT"),
        group=Group.COLLISIONS,
        formula="as given, or as sought in the range that the plan names",
        source=_CHIN,
        validity="homogeneous field",
    ),
    _own(
        Part.CEILING,
        Datum.LENGTH,
        Datum.TWO_BODY,
        Datum.THREE_BODY,
        Datum.TRAP,
        name="good_to_bad_at_ceiling",
        label="good to bad at the three-body ceiling",
        symbol="good/bad at K₃ = 201 ħa⁴/m",
        unit="1",
        units=("1",),
        group=Group.LOSSES,
        formula="elastic collisions over losses, with K₃ = 201 ħa⁴/m, or the known one where that is larger",
        source=_WEBER,
        validity="bosons with a > 0, longer than the range of the forces",
    ),
    _own(
        Part.TUNING,
        Datum.RESONANCES,
        name="resonance_field",
        label="broadest resonance at",
        symbol="B₀",
        unit="T",
        units=("G", "mT"),
        group=Group.COLLISIONS,
        formula="field of the broadest magnetic resonance by which the data tune the scattering length",
        source=_CHIN,
        validity="resonances that the data use",
    ),
    _own(
        Part.TUNING,
        Datum.RESONANCES,
        name="resonance_width",
        label="width of that resonance",
        symbol="|Δ|",
        unit="T",
        units=("G", "mG", "mT"),
        group=Group.COLLISIONS,
        formula="distance from the pole to the zero of a(B) = a_bg (1 − Δ/(B − B₀))",
        source=_CHIN,
        validity="resonances that the data use",
    ),
    _own(
        Part.TRAP,
        Datum.TRAP,
        name="trap_depth",
        label="trap depth",
        symbol="U",
        unit="J",
        units=("µK", "nK", "kHz", "J"),
        group=Group.CLOUD,
        formula="from the trap minimum to the lowest way out",
        source=_GRIMM,
        validity="light, field and gravity together",
    ),
    _own(
        Part.TRAP,
        Datum.TRAP,
        name="sag",
        label="sag",
        symbol="Δz",
        unit="m",
        units=("µm", "mm"),
        group=Group.CLOUD,
        formula="how far the minimum lies below where it would be without gravity; g/ω² in a harmonic trap",
        source="definition",
        validity="traps of beams and coils",
    ),
    _own(
        Part.TRAP,
        Datum.TRAP,
        name="light_scattering_rate",
        label="light scattering",
        symbol="Γ_sc",
        unit="1/s",
        units=("1/s",),
        group=Group.LOSSES,
        formula="photons of the beams scattered per atom and second, at the trap minimum",
        source=_GRIMM,
        validity="light far from every line",
    ),
    _own(
        Part.TRAP,
        Datum.TRAP,
        name="recoil_heating_rate",
        label="heating by scattered light",
        symbol="dT/dt by light",
        unit="K/s",
        units=("nK/s", "µK/s", "K/s"),
        group=Group.LOSSES,
        formula="two recoil energies per scattered photon, shared by the six degrees of freedom of a harmonic trap",
        source=_GRIMM,
        validity="harmonic trap",
    ),
    _own(
        Part.EVAPORATION,
        Datum.LENGTH,
        Datum.TWO_BODY,
        Datum.THREE_BODY,
        Datum.TRAP,
        name="evaporated_atoms",
        label="atoms at the target",
        symbol="N at target",
        unit="1",
        units=("1",),
        group=Group.THRESHOLD,
        formula="atoms left by the evaporation that leaves most of them at the target, the truncation parameter held",
        source=_LUITEN,
        validity="truncated Boltzmann kinetics, the whole trap lowered",
    ),
    _own(
        Part.EVAPORATION,
        Datum.LENGTH,
        Datum.TWO_BODY,
        Datum.THREE_BODY,
        Datum.TRAP,
        name="evaporation_time",
        label="time to the target",
        symbol="t to target",
        unit="s",
        units=("s", "min"),
        group=Group.THRESHOLD,
        formula="duration of that evaporation",
        source=_LUITEN,
        validity="truncated Boltzmann kinetics, the whole trap lowered",
    ),
)


def _of_cloud(row: Row) -> Column:
    data = {datum for need in row.needs for datum in _OF_NEED.get(need, ())}
    if row.group is Group.CONDENSATE or row.name == "critical_temperature_shifted":
        data.add(Datum.LENGTH)
    if row.name not in _OFF_THE_TRAP:
        data.add(Datum.TRAP)
    return Column(
        row=row, part=Part.CLOUD, data=frozenset(data), more_is_better=row.name not in _LESS_IS_BETTER
    )  # fmt: skip


COLUMNS = MappingProxyType(
    {column.name: column for column in (*_OWN, *(_of_cloud(row) for row in QUANTITIES.values() if not row.axes))}
)
"""Every column by the NAME of its quantity."""

USUAL_COLUMNS = (
    "threshold_temperature",
    "peak_phase_space_density",
    "temperature_to_threshold",
    "atoms_to_threshold",
    "scattering_length",
    "magnetic_field",
    "elastic_collision_rate",
    "rethermalisation_time",
    "good_to_bad_ratio",
    "good_to_bad_at_ceiling",
    "background_lifetime",
    "two_body_lifetime",
    "three_body_lifetime",
    "light_scattering_rate",
    "recoil_heating_rate",
    "trap_depth",
    "truncation",
    "sag",
    "resonance_field",
    "resonance_width",
    "evaporated_atoms",
    "evaporation_time",
)
"""What a table shows where nothing else is asked for."""

BRIEF_COLUMNS = (
    "threshold_temperature",
    "peak_phase_space_density",
    "scattering_length",
    "elastic_collision_rate",
    "good_to_bad_ratio",
)
"""What fits a narrow table."""


FIELD_COLUMNS = (
    "threshold_temperature",
    "magnetic_field",
    "scattering_length",
    "elastic_collision_rate",
    "good_to_bad_ratio",
    "good_to_bad_at_ceiling",
)
"""The same where fields were sought."""


def columns_in(group: Group) -> tuple[Column, ...]:
    """The columns under one heading, those of the usual table first."""
    found = [column for column in COLUMNS.values() if column.row.group is group]
    return tuple(sorted(found, key=lambda column: column.name not in USUAL_COLUMNS))


def column(name: str) -> Column:
    """A column by its NAME; ValueError, in one sentence, for any other."""
    found = COLUMNS.get(name.strip().casefold().replace(" ", "_").replace("-", "_"))
    if found is None:
        from app.plan_entries import nearest

        raise ValueError(f'"{name}" is not a column: the nearest is {nearest(name, list(COLUMNS))}')
    return found
