"""The named unit conversions, and nothing else.

Every quantity has one base unit inside the program; the workbook's headings may use others.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import Final

# unit as written -> (dimension, factor to the base unit of that dimension)
UNITS: Final = MappingProxyType(
    {
        "kVA": ("apparent power", 1.0),
        "VA": ("apparent power", 1e-3),
        "MVA": ("apparent power", 1e3),
        "kW": ("active power", 1.0),
        "W": ("active power", 1e-3),
        "MW": ("active power", 1e3),
        "kvar": ("reactive power", 1.0),
        "Mvar": ("reactive power", 1e3),
        "var": ("reactive power", 1e-3),
        "V": ("voltage", 1.0),
        "kV": ("voltage", 1e3),
        "A": ("current", 1.0),
        "kA": ("current", 1e3),
        "m": ("length", 1.0),
        "km": ("length", 1e3),
        "mm": ("small length", 1.0),
        "mm2": ("section", 1.0),
        "mm²": ("section", 1.0),
        "%": ("ratio", 0.01),
        "pu": ("ratio", 1.0),
        "p.u.": ("ratio", 1.0),
        "s": ("time", 1.0),
        "ms": ("time", 1e-3),
        "min": ("time", 60.0),
        "Hz": ("frequency", 1.0),
        "ohm": ("resistance", 1.0),
        "Ω": ("resistance", 1.0),
        "mohm": ("resistance", 1e-3),
        "mΩ": ("resistance", 1e-3),
        "ohm/km": ("resistance per length", 1.0),
        "Ω/km": ("resistance per length", 1.0),
        "mohm/m": ("resistance per length", 1.0),
        "uF/km": ("capacitance per length", 1.0),
        "µF/km": ("capacitance per length", 1.0),
        "nF/m": ("capacitance per length", 1.0),
        "nF/km": ("capacitance per length", 1e-3),
        "kWh": ("energy", 1.0),
        "MWh": ("energy", 1e3),
        "kgm2": ("moment of inertia", 1.0),
        "kgm²": ("moment of inertia", 1.0),
        "kg m2": ("moment of inertia", 1.0),
        "rpm": ("rotational speed", 1.0),
        "1/min": ("rotational speed", 1.0),
        "deg": ("angle", 1.0),
        "°": ("angle", 1.0),
        "°C": ("temperature", 1.0),
        "degC": ("temperature", 1.0),
        "A2s": ("let-through", 1.0),
        "A²s": ("let-through", 1.0),
        "kA2s": ("let-through", 1e6),
        "1/s": ("rate", 1.0),
        "x In": ("multiple", 1.0),
        "x Tn": ("multiple", 1.0),
        "x Ir": ("multiple", 1.0),
        "x rated-load field": ("multiple", 1.0),
        "h": ("duration", 1.0),
    }
)


def conversion_factor(found: str, wanted: str) -> float:
    """Return the factor that turns a number in unit `found` into unit `wanted`.

    Parameters
    ----------
    found, wanted : str
        Units as written in a heading, for example ``MVA`` and ``kVA``.

    Returns
    -------
    float
        Multiply a number in `found` by it.

    Raises
    ------
    KeyError
        An unknown unit.
    ValueError
        The two measure different things.

    Examples
    --------
    >>> conversion_factor("MVA", "kVA")
    1000.0
    >>> conversion_factor("%", "pu")
    0.01
    """
    dimension_found, factor_found = UNITS[found]
    dimension_wanted, factor_wanted = UNITS[wanted]
    if dimension_found != dimension_wanted:
        raise ValueError(f"{found} measures {dimension_found}, {wanted} measures {dimension_wanted}")
    return factor_found / factor_wanted
