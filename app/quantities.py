"""One row for every quantity that an answer gives: label, symbol, units, formula, source and what it needs.

Readouts, command output, JSON, table columns, tips and plots all read this list; there is no second one. A row's
`name` is the attribute that holds the number, in SI units, of `physics.cloud.Equilibrium`, of `physics.rates.Rates` or
of `physics.fermi_interactions.FermiEstimates`. The rows of the latter two are in `app.rate_quantities`.
"""

from __future__ import annotations

from collections.abc import Iterator
from types import MappingProxyType

from app.condensate_quantities import CONDENSATE_ROWS, THRESHOLD_ROWS
from app.harmonic_quantities import HARMONIC_ROWS
from app.quantity_row import Group, Need, Row
from app.rate_quantities import COLLISION_ROWS, FERMI_ROWS, LOSS_ROWS
from app.units import factor

__all__ = ["QUANTITIES", "Group", "Need", "Row", "display_factor", "rows_in"]

_TEMPERATURES = ("nK", "µK", "K", "kHz")
_LENGTHS = ("µm", "nm", "mm")
_DENSITIES = ("1/cm^3", "1/m^3")
_ENERGIES = ("nK", "kHz", "J")
_RATES = ("1/s",)
_NUMBER = ("1",)

_BAGNATO = "Bagnato, Pritchard, Kleppner, Phys. Rev. A 35, 4354 (1987)"
_BUTTS = "Butts, Rokhsar, Phys. Rev. A 55, 4346 (1997)"
_NARASCHEWSKI = "Naraschewski, Stamper-Kurn, Phys. Rev. A 58, 2423 (1998)"
_DALFOVO = "Dalfovo, Giorgini, Pitaevskii, Stringari, Rev. Mod. Phys. 71, 463 (1999)"
_GIORGINI = "Giorgini, Pitaevskii, Stringari, Phys. Rev. A 54, R4633 (1996)"
_GROSSMANN = "Grossmann, Holthaus, Phys. Lett. A 208, 188 (1995)"
_ROBINSON = "Robinson, Phys. Rev. 83, 678 (1951); DLMF 25.12"
_LUITEN = "Luiten, Reynolds, Walraven, Phys. Rev. A 53, 381 (1996)"
_DEFINITION = "definition"

_ROWS = (
    Row(
        name="peak_phase_space_density",
        label="peak phase-space density",
        symbol="D",
        unit="1",
        units=_NUMBER,
        group=Group.DEGENERACY,
        formula="largest n λ³ of the thermal atoms of one spin state: g_3/2(z) for bosons, f_3/2(z) for fermions",
        in_real_trap="largest n λ³ of the thermal atoms of one spin state, of momenta that are held",
        source=_ROBINSON,
        validity="local density; 2.612 at and below the condensation threshold",
    ),
    Row(
        name="reduced_temperature",
        label="reduced temperature",
        symbol="T/Tc or T/TF",
        unit="1",
        units=_NUMBER,
        group=Group.DEGENERACY,
        formula="T over the ideal critical temperature (bosons) or over the Fermi temperature (fermions)",
        source=f"{_BAGNATO}; {_BUTTS}",
        validity="large clouds in a harmonic trap",
    ),
    Row(
        name="classical_phase_space_density",
        label="classical phase-space density",
        symbol="N(ħω/kT)³",
        unit="1",
        units=_NUMBER,
        group=Group.DEGENERACY,
        formula="N (ħ ω̄ / k T)³; 1.202 at the condensation threshold",
        source=_BAGNATO,
        validity="what the Boltzmann formula gives for the peak n λ³",
    ),
    Row(
        name="fugacity",
        label="fugacity",
        symbol="z",
        unit="1",
        units=_NUMBER,
        group=Group.DEGENERACY,
        formula="z = exp(µ/kT), µ from the trap bottom",
        source=_ROBINSON,
        validity="local density",
    ),
    Row(
        name="log_fugacity",
        label="log of the fugacity",
        symbol="ln z",
        unit="1",
        units=_NUMBER,
        group=Group.DEGENERACY,
        formula="ln z = µ/kT, µ from the trap bottom",
        source=_ROBINSON,
        validity="local density",
    ),
    Row(
        name="chemical_potential",
        label="chemical potential",
        symbol="µ",
        unit="J",
        units=_ENERGIES,
        group=Group.DEGENERACY,
        formula="µ from the potential minimum; fixed by N = (kT/ħω̄)³ g₃(z) or f₃(z), by the condensate below threshold",
        in_real_trap="µ from the potential minimum; fixed by N, the sum over the levels below the depth",
        source=f"{_BAGNATO}; {_BUTTS}",
        validity="local density; exact levels add the zero-point energy",
    ),
    *HARMONIC_ROWS,
    Row(
        name="critical_temperature",
        label="critical temperature (ideal)",
        symbol="Tc",
        unit="K",
        units=_TEMPERATURES,
        group=Group.THRESHOLD,
        formula="k Tc = ħ ω̄ (N/ζ(3))^(1/3)",
        in_real_trap="N = ∫ ρ(ε) dε/(exp(ε/kTc) − 1), up to the depth; ρ from the volume curve",
        source=_BAGNATO,
        validity="ideal gas, N → ∞",
        needs=(Need.BOSONS,),
    ),
    Row(
        name="critical_temperature_shifted",
        label="critical temperature (shifted)",
        symbol="Tc + δTc",
        unit="K",
        units=_TEMPERATURES,
        group=Group.THRESHOLD,
        formula="Tc [1 − 0.7275 (ω_mean/ω̄) N^(−1/3) − 1.3255 (a/a_ho) N^(1/6)]",
        source=f"{_GROSSMANN}; {_GIORGINI}",
        validity="first order in both; the interaction term is left out where a is unknown",
        needs=(Need.BOSONS,),
    ),
    *THRESHOLD_ROWS,
    Row(
        name="fermi_temperature",
        label="Fermi temperature",
        symbol="TF",
        unit="K",
        units=_TEMPERATURES,
        group=Group.FERMI_SEA,
        formula="k TF = ħ ω̄ (6N)^(1/3), N per spin state",
        in_real_trap="N = ∫ ρ(ε) dε up to k TF; ρ from the volume curve",
        source=_BUTTS,
        validity="ideal gas, many filled levels",
        needs=(Need.FERMIONS,),
    ),
    Row(
        name="fermi_energy",
        label="Fermi energy",
        symbol="EF",
        unit="J",
        units=_ENERGIES,
        group=Group.FERMI_SEA,
        formula="EF = k TF",
        source=_BUTTS,
        validity="ideal gas, many filled levels",
        needs=(Need.FERMIONS,),
    ),
    Row(
        name="fermi_wavenumber",
        label="Fermi wavenumber at the centre",
        symbol="kF",
        unit="1/m",
        units=("1/µm", "1/m"),
        group=Group.FERMI_SEA,
        formula="kF = (2 m EF)^(1/2)/ħ",
        source=_BUTTS,
        validity="zero-temperature cloud, centre",
        needs=(Need.FERMIONS,),
    ),
    *FERMI_ROWS,
    Row(
        name="temperature_to_threshold",
        label="threshold temperature over T, at this N",
        symbol="Tθ/T",
        unit="1",
        units=_NUMBER,
        group=Group.THRESHOLD,
        formula="Tθ/T; below 1: the cloud must be colder by this factor",
        source=_DEFINITION,
        validity="threshold: condensation, or the chosen T/TF",
    ),
    Row(
        name="atoms_to_threshold",
        label="threshold atom number over N, at this T",
        symbol="Nθ/N",
        unit="1",
        units=_NUMBER,
        group=Group.THRESHOLD,
        formula="Nθ/N; above 1: the cloud needs this many times more atoms",
        source=_DEFINITION,
        validity="threshold: condensation, or the chosen T/TF",
    ),
    Row(
        name="atoms_left_at_target",
        label="share of atoms left at threshold",
        symbol="N'/N",
        unit="1",
        units=("%", "1"),
        group=Group.THRESHOLD,
        formula="(D_classical/D_threshold)^(1/γ), with γ = −d ln D/d ln N",
        in_real_trap="(N/Nθ)^(1/γ), with γ = −d ln D/d ln N: at fixed T the classical D goes as N",
        source=_LUITEN,
        validity="constant efficiency γ all the way",
        needs=(Need.EFFICIENCY,),
    ),
    Row(
        name="condensate_fraction",
        label="condensed fraction",
        symbol="N₀/N",
        unit="1",
        units=("%", "1"),
        group=Group.CONDENSATE,
        formula="ideal 1 − (T/Tc)³; semi-ideal from µ of the condensate; exact levels by summing them",
        source=f"{_BAGNATO}; {_NARASCHEWSKI}",
        validity="the model named in the heading",
        needs=(Need.BOSONS,),
    ),
    Row(
        name="condensate_atoms",
        label="condensed atoms",
        symbol="N₀",
        unit="1",
        units=_NUMBER,
        group=Group.CONDENSATE,
        formula="N₀, per spin state",
        source=_NARASCHEWSKI,
        validity="the model named in the heading",
        needs=(Need.BOSONS,),
    ),
    Row(
        name="condensate_radii",
        label="condensate radii",
        symbol="R",
        unit="m",
        units=_LENGTHS,
        group=Group.CONDENSATE,
        formula="Thomas-Fermi R_i = (2µ/m)^(1/2)/ω_i, µ = (ħω̄/2)(15 N₀ a/a_ho)^(2/5)",
        in_real_trap="(2µ/m)^(1/2)/ω_i with µ of the real trap: where a harmonic potential reaches µ",
        source=_DALFOVO,
        validity="N₀ a/a_ho ≫ 1",
        needs=(Need.BOSONS, Need.INTERACTING_CONDENSATE),
        axes=True,
    ),
    *CONDENSATE_ROWS,
    Row(
        name="thermal_radii",
        label="thermal radii (rms)",
        symbol="σ",
        unit="m",
        units=_LENGTHS,
        group=Group.CLOUD,
        formula="root mean square position of the thermal atoms along each axis",
        in_real_trap="rms radii of a harmonic cloud of the same mean potential energy",
        source=f"{_BAGNATO}; {_BUTTS}",
        validity="local density",
        axes=True,
    ),
    Row(
        name="peak_density",
        label="peak density",
        symbol="n(0)",
        unit="1/m^3",
        units=_DENSITIES,
        group=Group.CLOUD,
        formula="density of one spin state at its densest point, condensate included",
        source=_NARASCHEWSKI,
        validity="local density; an ideal condensate has the width of the ground level",
    ),
    Row(
        name="mean_density",
        label="mean density",
        symbol="⟨n⟩",
        unit="1/m^3",
        units=_DENSITIES,
        group=Group.CLOUD,
        formula="∫ n² d³r / N, one spin state",
        source=_DEFINITION,
        validity="local density",
    ),
    Row(
        name="energy_per_atom",
        label="energy per atom",
        symbol="E/N",
        unit="J",
        units=_ENERGIES,
        group=Group.CLOUD,
        formula="3 kT g₄/g₃ or f₄/f₃ above threshold; below it the model's own, with its interaction energy",
        in_real_trap="∫ ρ(ε) ε f(ε) dε/N above threshold; below it the model's own, with its interaction energy",
        source=f"{_BAGNATO}; {_BUTTS}; {_NARASCHEWSKI}",
        validity="from the potential minimum",
    ),
    Row(
        name="thermal_wavelength",
        label="thermal wavelength",
        symbol="λ",
        unit="m",
        units=("nm", "µm"),
        group=Group.CLOUD,
        formula="λ = h/(2π m k T)^(1/2)",
        source=_DEFINITION,
        validity="exact",
    ),
    Row(
        name="mean_frequency",
        label="mean trap frequency",
        symbol="f̄",
        unit="Hz",
        units=("Hz", "kHz"),
        group=Group.CLOUD,
        formula="f̄ = (f₁ f₂ f₃)^(1/3)",
        source=_DEFINITION,
        validity="harmonic trap",
    ),
    Row(
        name="truncation",
        label="truncation parameter",
        symbol="η",
        unit="1",
        units=_NUMBER,
        group=Group.CLOUD,
        formula="η = depth/kT",
        source=_LUITEN,
        validity="depth from the trap minimum to the lowest way out",
        needs=(Need.DEPTH,),
    ),
    Row(
        name="elastic_collision_rate",
        label="elastic collision rate, mean per atom",
        symbol="Γ",
        unit="1/s",
        units=_RATES,
        group=Group.COLLISIONS,
        formula="n(0) σ v̄/2 for a thermal cloud, σ averaged over the thermal speeds",
        in_real_trap="√2 ⟨n_cl⟩/n_cl(0) n(0) σ v̄, ⟨n_cl⟩/n_cl(0) of a classical cloud in the trap",
        source=_LUITEN,
        validity="thermal atoms, s-wave; the unitarity limit is in σ, an effective range is not; bosons near Tc collide"
        " more often, by 27 % at 1.1 Tc, and fermions below TF/2 less",
        needs=(Need.COLLISIONS,),
    ),
    Row(
        name="mean_free_path",
        label="mean free path at the centre",
        symbol="ℓ",
        unit="m",
        units=("µm", "mm", "m"),
        group=Group.COLLISIONS,
        formula="1/(√2 n σ) at the peak of the thermal density",
        source=_DEFINITION,
        validity="thermal atoms, s-wave",
        needs=(Need.COLLISIONS,),
    ),
    *COLLISION_ROWS,
    *LOSS_ROWS,
    Row(
        name="classical_density_error",
        label="classical peak density",
        symbol="n_cl/n − 1",
        unit="1",
        units=("%", "1"),
        group=Group.CLASSICAL,
        formula="N(ħω̄/kT)³ over the peak n λ³ of the thermal atoms, less 1",
        in_real_trap="n λ³ of a classical cloud in this trap, cut at its depth, over the peak n λ³, less 1",
        source=_ROBINSON,
        validity="local density",
    ),
    Row(
        name="classical_energy_error",
        label="classical energy",
        symbol="3kT N/E − 1",
        unit="1",
        units=("%", "1"),
        group=Group.CLASSICAL,
        formula="3 N k T over the energy of this answer, less 1",
        in_real_trap="energy of a classical cloud in this trap, cut at its depth, over that of this answer, less 1",
        source=_ROBINSON,
        validity="local density",
    ),
    Row(
        name="classical_pressure_error",
        label="classical pressure",
        symbol="n kT/p − 1",
        unit="1",
        units=("%", "1"),
        group=Group.CLASSICAL,
        formula="n k T over the pressure of the thermal gas where it is densest, less 1",
        source=_ROBINSON,
        validity="local density",
    ),
    Row(
        name="fitted_temperature_error",
        label="temperature by a Gaussian fit",
        symbol="T_fit/T − 1",
        unit="1",
        units=("%", "1"),
        group=Group.CLASSICAL,
        formula="temperature that a Gaussian fitted to the expanded cloud gives, over T, less 1",
        source=_ROBINSON,
        validity="thermal atoms, after a long free expansion",
    ),
)

QUANTITIES = MappingProxyType({row.name: row for row in _ROWS})
"""Every quantity by its NAME, in reading order."""


def rows_in(group: Group) -> Iterator[Row]:
    """The quantities under one heading, in reading order."""
    return (row for row in _ROWS if row.group is group)


def display_factor(unit: str, row: Row) -> float:
    """SI value of one display unit of a quantity: 1e-9 for a temperature in nK, k times that for an energy in nK."""
    return factor(unit, "" if row.unit == "1" else row.unit)
