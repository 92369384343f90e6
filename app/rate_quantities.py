"""Rows of the table of quantities: what is estimated of interacting fermions, collisions, losses and heating.

See `app.quantities`, which holds the whole table.
"""

from __future__ import annotations

from app.quantity_row import Group, Need, Row

_TIMES = ("s", "ms", "min", "h")
_RATES = ("1/s",)
_HEATING = ("nK/s", "µK/s", "K/s")
_TEMPERATURES = ("nK", "µK", "K", "kHz")
_ENERGIES = ("nK", "kHz", "J")
_NUMBER = ("1",)

_DEFINITION = "definition"
_BUTTS = "Butts, Rokhsar, Phys. Rev. A 55, 4346 (1997)"
_GORKOV = "Gorkov, Melik-Barkhudarov, Sov. Phys. JETP 13, 1018 (1961)"
_KU = "Ku, Sommer, Cheuk, Zwierlein, Science 335, 563 (2012)"
_GIORGINI = "Giorgini, Pitaevskii, Stringari, Rev. Mod. Phys. 80, 1215 (2008)"
_BOHN = "Bohn, Jin, Phys. Rev. A 89, 022702 (2014)"
_DALIBARD = "Dalibard, Proc. Int. School Enrico Fermi CXL, 321 (1999)"
_KETTERLE = "Ketterle, van Druten, Adv. At. Mol. Opt. Phys. 37, 181 (1996)"
_WU = "Wu, Foot, J. Phys. B 29, L321 (1996)"
_BURT = "Burt et al., Phys. Rev. Lett. 79, 337 (1997)"
_SOEDING = "Soeding et al., Appl. Phys. B 69, 257 (1999)"
_WEBER = "Weber et al., Phys. Rev. Lett. 91, 123201 (2003)"
_DINCAO = "D'Incao, Suno, Esry, Phys. Rev. Lett. 93, 123201 (2004)"
_SAVARD = "Savard, O'Hara, Thomas, Phys. Rev. A 56, R1095 (1997)"
_GRIMM = "Grimm, Weidemüller, Ovchinnikov, Adv. At. Mol. Opt. Phys. 42, 95 (2000)"
_PETRICH = "Petrich, Anderson, Ensher, Cornell, Phys. Rev. Lett. 74, 3352 (1995), recalled"
_AS_NOW = "the cloud as it is now: density, and with it the loss, falls as atoms go"

FERMI_ROWS = (
    Row(
        name="fermi_radii",
        label="Fermi radii",
        symbol="R_F",
        unit="m",
        units=("µm", "nm", "mm"),
        group=Group.FERMI_SEA,
        formula="R_i = (2 EF/m)^(1/2)/ω_i",
        source=_BUTTS,
        validity="zero temperature, ideal gas",
        needs=(Need.FERMIONS,),
        axes=True,
    ),
    Row(
        name="interaction_parameter",
        label="interaction parameter",
        symbol="1/(kF a)",
        unit="1",
        units=_NUMBER,
        group=Group.FERMI_SEA,
        formula="1/(kF a): 0 at unitarity, below −1 weak attraction, above 1 pairs",
        source=_GIORGINI,
        validity="kF of the ideal cloud at the centre; the ideal answer has no interaction in it",
        needs=(Need.FERMIONS, Need.MIXTURE),
    ),
    Row(
        name="superfluid_temperature",
        label="superfluid below, estimate",
        symbol="Tc",
        unit="K",
        units=_TEMPERATURES,
        group=Group.FERMI_SEA,
        formula="0.277 TF exp(−π/(2 kF|a|)) for a < 0; 0.2 TF at unitarity; 0.518 TF for pairs of small a > 0",
        source=f"{_GORKOV}; {_KU}; {_GIORGINI}",
        validity="1/(kF a) below −1, within ±0.2, above 1; good to some ten percent",
        needs=(Need.FERMIONS, Need.MIXTURE, Need.KNOWN_COUPLING),
    ),
    Row(
        name="interacting_chemical_potential",
        label="chemical potential with interaction, estimate",
        symbol="µ",
        unit="J",
        units=_ENERGIES,
        group=Group.FERMI_SEA,
        formula="EF (1 + 0.165 kF a) for kF|a| < 1; ξ^(1/2) EF with ξ = 0.376(4) at unitarity",
        source=f"{_KU}; {_GIORGINI}",
        validity="zero temperature; for a > 0 of atoms that have not paired",
        needs=(Need.FERMIONS, Need.MIXTURE, Need.KNOWN_COUPLING),
    ),
    Row(
        name="pair_binding_energy",
        label="binding energy of a pair",
        symbol="E_b",
        unit="J",
        units=("µK", "nK", "kHz", "MHz", "J"),
        group=Group.FERMI_SEA,
        formula="E_b = ħ²/(m a²)",
        source=_GIORGINI,
        validity="a > 0, much longer than the range of the forces",
        needs=(Need.FERMIONS, Need.MIXTURE, Need.POSITIVE_LENGTH),
    ),
)

COLLISION_ROWS = (
    Row(
        name="collision_cross_section",
        label="collision cross-section",
        symbol="σ",
        unit="m^2",
        units=("cm^2", "m^2"),
        group=Group.COLLISIONS,
        formula="8π a² of bosons, 4π a² with each other spin state; over 1 + k²a², averaged over the thermal speeds",
        source=f"{_DALIBARD}; dipoles: {_BOHN}",
        validity="s-waves, one length for all pairs; strong dipoles add (32π/45) a_d², fermions (32π/15) a_d²",
        needs=(Need.COLLISIONS,),
    ),
    Row(
        name="peak_collision_rate",
        label="elastic collision rate at the centre",
        symbol="Γ(0)",
        unit="1/s",
        units=_RATES,
        group=Group.COLLISIONS,
        formula="n(0) σ √2 v̄, of an atom where thermal atoms are densest",
        source=_KETTERLE,
        validity="2.83 times the mean rate",
        needs=(Need.COLLISIONS,),
    ),
    Row(
        name="rethermalisation_time",
        label="rethermalisation time",
        symbol="τ_th",
        unit="s",
        units=("ms", "s", "min", "h"),
        group=Group.COLLISIONS,
        formula="2.7/Γ, Γ the mean elastic collision rate",
        source=_WU,
        validity="s-waves slow against the unitarity limit; thermal atoms",
        needs=(Need.COLLISIONS, Need.COLLIDING),
    ),
    Row(
        name="hydrodynamic_ratio",
        label="collision rate over trap frequency",
        symbol="Γ/ω_max",
        unit="1",
        units=_NUMBER,
        group=Group.COLLISIONS,
        formula="mean elastic collision rate over the highest angular trap frequency",
        source=_KETTERLE,
        validity="above 1 the cloud is hydrodynamic: atoms do not cross it freely, and evaporation slows",
        needs=(Need.COLLISIONS,),
    ),
    Row(
        name="free_path_ratios",
        label="mean free path over thermal radii",
        symbol="ℓ/σ_i",
        unit="1",
        units=_NUMBER,
        group=Group.COLLISIONS,
        formula="1/(√2 n σ) at the centre over the rms radius along each axis",
        source=_DEFINITION,
        validity="below 1: opaque to its own atoms along that axis",
        needs=(Need.COLLISIONS, Need.COLLIDING),
        axes=True,
    ),
    Row(
        name="good_to_bad_ratio",
        label="good to bad collisions",
        symbol="R",
        unit="1",
        units=_NUMBER,
        group=Group.COLLISIONS,
        formula="elastic collisions of an atom in its lifetime, Γ τ",
        source=_KETTERLE,
        validity="losses that are known; evaporation wants some hundred",
        needs=(Need.COLLISIONS, Need.LOSSES),
    ),
)

LOSS_ROWS = (
    Row(
        name="background_lifetime",
        label="background lifetime",
        symbol="τ₁",
        unit="s",
        units=_TIMES,
        group=Group.LOSSES,
        formula="1/Γ₁, as given",
        source=_DEFINITION,
        validity="1/e",
        needs=(Need.BACKGROUND,),
    ),
    Row(
        name="two_body_lifetime",
        label="two-body lifetime",
        symbol="τ₂",
        unit="s",
        units=_TIMES,
        group=Group.LOSSES,
        formula="1/(K₂⟨n⟩); ⟨n⟩ = ∫ (n_c²/2 + 2 n_c n_th + n_th²)/N",
        source=f"{_BURT}; {_SOEDING}",
        validity=_AS_NOW,
        needs=(Need.TWO_BODY,),
    ),
    Row(
        name="three_body_lifetime",
        label="three-body lifetime",
        symbol="τ₃",
        unit="s",
        units=_TIMES,
        group=Group.LOSSES,
        formula="1/(K₃⟨n²⟩); ⟨n²⟩ = ∫ (n_c³/6 + (3/2) n_c² n_th + 3 n_c n_th² + n_th³)/N",
        source=f"{_BURT}; {_SOEDING}",
        validity=_AS_NOW,
        needs=(Need.THREE_BODY,),
    ),
    Row(
        name="spin_flip_lifetime",
        label="lifetime by spin flips at the zero of the field",
        symbol="τ_flip",
        unit="s",
        units=_TIMES,
        group=Group.LOSSES,
        formula="1/(χ (ħ/m) (F/kT)²), F the force on the strong axis, χ = 0.54: the mean of those quoted, 0.16 to 1.85",
        source=_PETRICH,
        validity="an order of magnitude; thermal atoms in a quadrupole",
        needs=(Need.FIELD_ZERO,),
    ),
    Row(
        name="total_lifetime",
        label="lifetime by all known losses",
        symbol="τ",
        unit="s",
        units=_TIMES,
        group=Group.LOSSES,
        formula="1/τ = 1/τ₁ + 1/τ₂ + 1/τ₃ + 1/τ_flip, of those that are known",
        source=_DEFINITION,
        validity="an upper bound where one is not known",
        needs=(Need.LOSSES,),
    ),
    Row(
        name="loss_per_rethermalisation",
        label="share lost in a rethermalisation time",
        symbol="τ_th/τ",
        unit="1",
        units=("%", "1"),
        group=Group.LOSSES,
        formula="rethermalisation time over the lifetime by all known losses",
        source=_DEFINITION,
        validity="above 1 the cloud is lost before it is in equilibrium",
        needs=(Need.COLLISIONS, Need.COLLIDING, Need.LOSSES),
    ),
    Row(
        name="loss_heating_rate",
        label="heating by loss",
        symbol="dT/dt by loss",
        unit="K/s",
        units=_HEATING,
        group=Group.LOSSES,
        formula="(T/4) K₂⟨n⟩ + (T/3) K₃⟨n²⟩ of a classical cloud: lost atoms carry 9/4 and 2 kT, not 3",
        source=_WEBER,
        validity="harmonic trap, no condensate, in equilibrium; here with the energies of the ideal quantum gas",
        needs=(Need.LOSSES, Need.NO_CONDENSATE),
    ),
    Row(
        name="scattering_rate",
        label="photons scattered",
        symbol="Γ_sc",
        unit="1/s",
        units=_RATES,
        group=Group.LOSSES,
        formula="sum over the beams, each at its intensity in the minimum of the trap",
        source=_GRIMM,
        validity="per atom; an upper bound in a trap of attracting light; far from every line",
        needs=(Need.LIGHT,),
    ),
    Row(
        name="light_heating_rate",
        label="heating by the trap's light",
        symbol="dT/dt by light",
        unit="K/s",
        units=_HEATING,
        group=Group.LOSSES,
        formula="2 E_rec Γ_sc/(3k), summed over the beams; E_rec = h²/(2 m λ²)",
        source=_GRIMM,
        validity="a cloud in a harmonic trap, which holds 3 kT an atom",
        needs=(Need.LIGHT_HEATING,),
    ),
    Row(
        name="heating_rate",
        label="heating, all that is known",
        symbol="dT/dt",
        unit="K/s",
        units=_HEATING,
        group=Group.LOSSES,
        formula="given heating, else that by light + T times the mean of π² f² S(2f) over the axes "
        "+ Σ 4π⁴ m f⁴ S_x/(3k) + heating by loss",
        source=f"{_SAVARD}; {_WEBER}",
        validity="a lower bound where a part is not known; with a condensate without that by loss",
        needs=(Need.HEATING,),
    ),
    Row(
        name="three_body_ceiling",
        label="most that K₃ can be near a resonance",
        symbol="K₃ max",
        unit="m^6/s",
        units=("cm^6/s", "m^6/s"),
        group=Group.LOSSES,
        formula="the lower of 201 ħ a⁴/m and 36 √3 π² ħ⁵/(m³ (kT)²)",
        source=f"{_WEBER}; {_DINCAO}",
        validity="identical bosons with a beyond the range of the forces; Efimov resonances at a < 0 exceed the first",
        needs=(Need.BOSONS, Need.SCATTERING_LENGTH),
    ),
)
