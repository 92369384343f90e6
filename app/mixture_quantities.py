"""One row for every quantity of two species in one trap; as `app.quantities`, whose rows are of one cloud.

A row's `name` is an attribute of `physics.mixtures.Mixture`, but for the scattering length between the two.
"""

from __future__ import annotations

from types import MappingProxyType

from app.quantity_row import Group, Row

_TEMPERATURES = ("nK", "µK", "K", "kHz")
_ENERGIES = ("nK", "kHz", "J")
_LENGTHS = ("µm", "nm", "mm")
_TIMES = ("s", "ms", "min", "h")
_NUMBER = ("1",)

_DEFINITION = "definition"
_MUDRICH = "Mudrich et al., Phys. Rev. Lett. 88, 253001 (2002)"
_DELANNOY = "Delannoy et al., Phys. Rev. A 63, 051602 (2001); recalled"
_PETHICK = "Pethick, Smith, Bose-Einstein Condensation in Dilute Gases (2008), chapter 12; recalled"
_VIVERIT = "Viverit, Pethick, Smith, Phys. Rev. A 61, 053605 (2000); recalled"
_CLASSICAL = "classical clouds; an estimate where one is degenerate"
_ALONE = "each cloud as it is without the other"

_ROWS = (
    Row(
        name="scattering_length_between",
        label="scattering length between the species",
        symbol="a₁₂",
        unit="m",
        units=("a0", "nm"),
        group=Group.COLLISIONS,
        formula="given in the plan, or from the data, at the field where there is one",
        source=_DEFINITION,
        validity="the states that the data name",
    ),
    Row(
        name="distance",
        label="distance of the two minima",
        symbol="d",
        unit="m",
        units=_LENGTHS,
        group=Group.CLOUD,
        formula="between the minima of the trap as each species sees it; by sag g (1/ω₁² − 1/ω₂²)",
        source=_DEFINITION,
        validity="0 where frequencies are given that are those of both",
    ),
    Row(
        name="overlap_share",
        label="overlap, over that of concentric clouds",
        symbol="e^(−d²/2S)",
        unit="1",
        units=_NUMBER,
        group=Group.CLOUD,
        formula="product over the axes of exp(−d²/(2 S)), S the sum of both mean square radii",
        source=_MUDRICH,
        validity="Gaussian clouds of the rms radii of the thermal atoms",
    ),
    Row(
        name="met_density",
        label="density of the first species that a passenger meets",
        symbol="⟨n₁⟩₂",
        unit="1/m^3",
        units=("1/cm^3", "1/m^3"),
        group=Group.CLOUD,
        formula="N₁ times the product over the axes of exp(−d²/(2 S))/(2π S)^(1/2)",
        source=_MUDRICH,
        validity="Gaussian clouds of the rms radii of the thermal atoms",
    ),
    Row(
        name="coolant_collision_rate",
        label="collisions of an atom of the first species with passengers",
        symbol="Γ₁₂",
        unit="1/s",
        units=("1/s",),
        group=Group.COLLISIONS,
        formula="σ₁₂ v₁₂ N₂ times the overlap, 4π a₁₂²/(1 + k² a₁₂²) averaged over speeds",
        source=_MUDRICH,
        validity=_CLASSICAL,
    ),
    Row(
        name="passenger_collision_rate",
        label="collisions of a passenger with the first species",
        symbol="Γ₂₁",
        unit="1/s",
        units=("1/s",),
        group=Group.COLLISIONS,
        formula="σ₁₂ v₁₂ N₁ times the overlap",
        source=_MUDRICH,
        validity=_CLASSICAL,
    ),
    Row(
        name="rethermalisation_collisions",
        label="collisions for one rethermalisation",
        symbol="3/ξ",
        unit="1",
        units=_NUMBER,
        group=Group.COLLISIONS,
        formula="3/ξ, ξ = 4 m₁ m₂/(m₁ + m₂)²",
        source=_MUDRICH,
        validity="a passenger much smaller than the first cloud",
    ),
    Row(
        name="relaxation_time",
        label="rethermalisation time of the two",
        symbol="τ₁₂",
        unit="s",
        units=_TIMES,
        group=Group.COLLISIONS,
        formula="1/τ = (ξ/3)(1/N₁ + 1/N₂) Z₁₂: the difference of the temperatures falls by e",
        source=_MUDRICH,
        validity=_CLASSICAL,
    ),
    Row(
        name="common_temperature",
        label="common temperature after long contact",
        symbol="T∞",
        unit="K",
        units=_TEMPERATURES,
        group=Group.COLLISIONS,
        formula="(N₁ T₁ + N₂ T₂)/(N₁ + N₂)",
        source=_DEFINITION,
        validity="classical clouds in harmonic traps",
    ),
    Row(
        name="coldest_temperature",
        label="temperature when the first species is used up",
        symbol="T(N₁ → 0)",
        unit="K",
        units=_TEMPERATURES,
        group=Group.THRESHOLD,
        formula="T∞ (N₂/(N₁ + N₂))^α, α = (γ + 1)/3 of the efficiency γ that the target assumes",
        source=_DELANNOY,
        validity="close contact, fixed frequencies, no loss of passengers",
    ),
    Row(
        name="most_passengers",
        label="passengers that can be brought to degeneracy",
        symbol="N₂ max",
        unit="1",
        units=_NUMBER,
        group=Group.THRESHOLD,
        formula="N₁ x/(1 − x), x = (T_threshold/T∞)^(1/α), at the threshold of this passenger",
        source=_DELANNOY,
        validity="close contact, fixed frequencies, no loss of passengers",
    ),
    Row(
        name="coolant_at_threshold",
        label="atoms of the first species left then",
        symbol="N₁(threshold)",
        unit="1",
        units=_NUMBER,
        group=Group.THRESHOLD,
        formula="(N₁ + N₂)(T_threshold/T∞)^(1/α) − N₂, and 0 where it is used up before",
        source=_DELANNOY,
        validity="close contact, fixed frequencies, no loss of passengers",
    ),
    Row(
        name="shift_of_passenger",
        label="mean-field shift of a passenger in the first cloud",
        symbol="g₁₂ n₁",
        unit="J",
        units=_ENERGIES,
        group=Group.CONDENSATE,
        formula="2π ħ² a₁₂ n₁/m_r where that cloud is densest",
        source=_PETHICK,
        validity=_ALONE,
    ),
    Row(
        name="shift_of_coolant",
        label="mean-field shift of the first species in the passenger",
        symbol="g₁₂ n₂",
        unit="J",
        units=_ENERGIES,
        group=Group.CONDENSATE,
        formula="2π ħ² a₁₂ n₂/m_r where that cloud is densest",
        source=_PETHICK,
        validity=_ALONE,
    ),
    Row(
        name="miscibility_parameter",
        label="miscibility of two condensates, below 1",
        symbol="g₁₂²/(g₁ g₂)",
        unit="1",
        units=_NUMBER,
        group=Group.CONDENSATE,
        formula="a₁₂² (m₁ + m₂)²/(4 m₁ m₂ a₁ a₂)",
        source=_PETHICK,
        validity="uniform condensates; small clouds and different sags move the border",
    ),
    Row(
        name="bose_fermi_parameter",
        label="stability of condensate and Fermi gas, below 1",
        symbol="g₁₂² n_F^(1/3)/(⅔ A g)",
        unit="1",
        units=_NUMBER,
        group=Group.CONDENSATE,
        formula="A = ħ² (6π²)^(2/3)/(2 m_F), n_F at the centre",
        source=_VIVERIT,
        validity="uniform gases at zero temperature",
    ),
)

MIXTURE_QUANTITIES = MappingProxyType({row.name: row for row in _ROWS})
"""NAME -> row, in the order in which they are shown."""

CONTACT_COLUMNS = tuple(
    MIXTURE_QUANTITIES[name]
    for name in (
        "overlap_share",
        "distance",
        "coolant_collision_rate",
        "passenger_collision_rate",
        "relaxation_time",
    )
)
"""Those that are also columns of `physics.sympathetic.ContactRows`, along a ramp."""
