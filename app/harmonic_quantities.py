"""Rows of what the harmonic trap of the same frequencies would answer for a cloud in a trap of beams and coils."""

from __future__ import annotations

from app.quantity_row import Group, Need, Row

_SOURCE = "as the quantity without this word, in a harmonic trap without end"

HARMONIC_ROWS = (
    Row(
        name="harmonic_reduced_temperature",
        label="reduced temperature (harmonic)",
        symbol="T/Tc harm. or T/TF harm.",
        unit="1",
        units=("1",),
        group=Group.HARMONIC,
        formula="(ζ(3)/X)^(1/3) of bosons, (6X)^(−1/3) of fermions, X = N(ħω/kT)³",
        source=_SOURCE,
        validity="how far the answer would be off that knows the frequencies only",
        needs=(Need.REAL_TRAP,),
    ),
    Row(
        name="harmonic_peak_phase_space_density",
        label="phase-space density (harmonic)",
        symbol="D harm.",
        unit="1",
        units=("1",),
        group=Group.HARMONIC,
        formula="largest n λ³ of the thermal atoms, by the same model",
        source=_SOURCE,
        validity="how far the answer would be off that knows the frequencies only",
        needs=(Need.REAL_TRAP,),
    ),
    Row(
        name="harmonic_condensate_fraction",
        label="condensed fraction (harmonic)",
        symbol="N₀/N harm.",
        unit="1",
        units=("%", "1"),
        group=Group.HARMONIC,
        formula="N₀/N, by the same model",
        source=_SOURCE,
        validity="how far the answer would be off that knows the frequencies only",
        needs=(Need.BOSONS, Need.REAL_TRAP),
    ),
)
