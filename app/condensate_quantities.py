"""Rows of the table of quantities: the condensate by itself, and thresholds beyond the ideal one.

See `app.quantities`, which holds the whole table. The attributes are those of `physics.condensate.Condensate` and
`physics.thresholds.Thresholds`.
"""

from __future__ import annotations

from types import MappingProxyType

from app.quantity_row import Group, Need, Row

_LENGTHS = ("µm", "nm", "mm")
_NUMBER = ("1",)

_BAYM = "Baym, Pethick, Phys. Rev. Lett. 76, 6 (1996)"
_DALFOVO = "Dalfovo, Giorgini, Pitaevskii, Stringari, Rev. Mod. Phys. 71, 463 (1999)"
_RUPRECHT = "Ruprecht, Holland, Burnett, Edwards, Phys. Rev. A 51, 4704 (1995)"
_LAHAYE = "Lahaye et al., Rep. Prog. Phys. 72, 126401 (2009)"
_GROSSMANN = "Grossmann, Holthaus, Phys. Lett. A 208, 188 (1995)"

THRESHOLD_ROWS = (
    Row(
        name="critical_temperature_exact_levels",
        label="critical temperature (exact levels)",
        symbol="Tc levels",
        unit="K",
        units=("nK", "µK", "K", "kHz"),
        group=Group.THRESHOLD,
        formula="temperature at which the excited levels hold all atoms: N = Σ 1/(exp((E − E₀)/kT) − 1)",
        source=_GROSSMANN,
        validity="ideal gas, any N; a small cloud has no sharp threshold",
        needs=(Need.BOSONS,),
    ),
)

CONDENSATE_ROWS = (
    Row(
        name="condensate_interaction",
        label="interaction of the condensate",
        symbol="N₀a/a_ho",
        unit="1",
        units=_NUMBER,
        group=Group.CONDENSATE,
        formula="N₀ a/a_ho: Thomas-Fermi well above 1, a Gaussian well below",
        source=_BAYM,
        validity="N₀ of the model in use",
        needs=(Need.BOSONS, Need.CONDENSATE, Need.SCATTERING_LENGTH),
    ),
    Row(
        name="condensate_rms_radii",
        label="condensate rms radii",
        symbol="√⟨x²⟩₀",
        unit="m",
        units=_LENGTHS,
        group=Group.CONDENSATE,
        formula="between the Gaussian of least energy and the Thomas-Fermi shape, by the strength of the interaction",
        source=f"{_BAYM}; {_DALFOVO}",
        validity="any N₀ a/a_ho short of collapse; within 0.3 % in round traps, 6 % in long ones",
        needs=(Need.BOSONS, Need.CONDENSATE, Need.STABLE_CONDENSATE),
        axes=True,
    ),
    Row(
        name="condensate_release_energy",
        label="release energy per condensed atom",
        symbol="E_rel/N₀",
        unit="J",
        units=("nK", "kHz", "J"),
        group=Group.CONDENSATE,
        formula="kinetic and interaction energy; (2/7) µ in the Thomas-Fermi limit",
        source=_DALFOVO,
        validity="any N₀ a/a_ho short of collapse",
        needs=(Need.BOSONS, Need.CONDENSATE, Need.STABLE_CONDENSATE),
    ),
    Row(
        name="healing_length",
        label="healing length",
        symbol="ξ",
        unit="m",
        units=("nm", "µm"),
        group=Group.CONDENSATE,
        formula="1/(8π n₀ a)^(1/2) at the centre",
        source=_DALFOVO,
        validity="repulsive atoms",
        needs=(Need.BOSONS, Need.CONDENSATE, Need.REPULSIVE),
    ),
    Row(
        name="collapse_atoms",
        label="largest attractive condensate",
        symbol="N_collapse",
        unit="1",
        units=_NUMBER,
        group=Group.CONDENSATE,
        formula="0.575 a_ho/|a|",
        source=_RUPRECHT,
        validity="isotropic trap; with ω̄ elsewhere a few percent off",
        needs=(Need.BOSONS, Need.ATTRACTIVE),
    ),
    Row(
        name="dipolar_ratio",
        label="dipolar over scattering length",
        symbol="a_dd/a",
        unit="1",
        units=_NUMBER,
        group=Group.CONDENSATE,
        formula="µ₀ m_dipole² m/(12π ħ² a)",
        source=_LAHAYE,
        validity="above 1 a large condensate in a round trap is unstable",
        needs=(Need.BOSONS, Need.DIPOLES),
    ),
)

CONDENSATE_ATTRIBUTES = MappingProxyType(
    {
        "condensate_interaction": "interaction_parameter",
        "condensate_rms_radii": "rms_radii",
        "condensate_release_energy": "release_energy_per_atom",
        "healing_length": "healing_length",
        "collapse_atoms": "collapse_atoms",
        "dipolar_ratio": "dipolar_ratio",
    }
)
"""NAME -> attribute of `Condensate`."""

THRESHOLD_ATTRIBUTES = MappingProxyType({"critical_temperature_exact_levels": "exact_saturation"})
"""NAME -> attribute of `Thresholds`."""
