"""Resistance and reactance of a cable: the maker's where given, else by conductor and section."""

from __future__ import annotations

from study.formulas.cables import conductor_resistance, resistance_at, skin_effect_factor, typical_reactance
from study.model.branches import Cable


def cable_ohm_per_km(cable: Cable, f_hz: float) -> tuple[float, float]:
    """Return resistance at operating temperature, with skin effect, and reactance of one run.

    Source: IEC 60228 for the conductor, IEC 60287-1-1 for temperature and skin effect; see `formulas.cables`.

    Parameters
    ----------
    cable : Cable
        The run.
    f_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    tuple of float
        Resistance and reactance. [ohm/km]

    Raises
    ------
    ValueError
        A section outside the tables where the maker's value is not given.
    """
    r20 = cable.resistance_ohm_per_km
    if r20 is None:
        r20 = conductor_resistance(cable.section_mm2, cable.conductor, cable.conductor_class, cable.tinned)
    x = cable.reactance_ohm_per_km
    if x is None:
        x = typical_reactance(cable.section_mm2, cable.cores, f_hz)
    r = resistance_at(r20, cable.conductor_temperature_degc, cable.conductor)
    return float(r * skin_effect_factor(r, f_hz)), x
