"""Shared data sheets of the demo vessels: machine and field types, breaker curves, converter spectra.

All invented; the figures are typical of the kind (common practice, no source) unless a row says otherwise.
"""

from __future__ import annotations

from typing import Final

Row = dict[str, object]

MACHINE_HEADINGS: Final = (
    "Xd [pu]|Xd' [pu]|Xd'' [pu]|Xd' saturated [pu]|Xd'' saturated [pu]|Xq [pu]|Xq' [pu]|Xq'' [pu]"
    "|Xl [pu]|X2 [pu]|X0 [pu]|Stator resistance [pu]|Td0' [s]|Td' [s]|Td'' [s]|Tq'' [s]"
    "|Armature time constant [s]|Saturation S(1.0)|Saturation S(1.2)|Reactance tolerance [%]"
    "|Inertia constant [s]"
)
# one line per machine type, in the order of MACHINE_HEADINGS
MACHINES: Final = {
    "LV 50": (
        "2.00 .200 .150 .180 .135 1.10 1.10 .180 .08 .165 .04 .0250 0.60 .060 .008 .008 .018 .10 .38 15 0.60"
    ),
    "LV 150": (
        "2.20 .205 .148 .185 .133 1.25 1.25 .175 .08 .160 .04 .0200 0.95 .089 .010 .010 .025 .10 .36 15 0.70"
    ),
    "LV 500": (
        "2.30 .220 .152 .198 .137 1.30 1.30 .185 .09 .168 .05 .0140 1.70 .163 .013 .012 .032 .10 .34 15 0.90"
    ),
    "LV 800": (
        "2.40 .230 .158 .207 .142 1.35 1.35 .190 .09 .174 .05 .0120 2.00 .192 .015 .014 .038 .10 .34 15 1.00"
    ),
    "MV 3500": (
        "2.00 .280 .195 .250 .175 1.05 1.05 .220 .12 .207 .08 .0090 4.00 .560 .024 .022 .061 .09 .31 15 1.30"
    ),
    "MV 5600": (
        "1.95 .290 .200 .260 .180 1.00 1.00 .225 .12 .212 .08 .0080 4.60 .684 .026 .024 .070 .09 .30 15 1.50"
    ),
    "MV motor": (
        "1.60 .300 .210 .270 .190 0.95 0.95 .230 .13 .220 .09 .0110 2.60 .488 .022 .020 .053 .08 .30 15 1.0"
    ),
}

FIELD_HEADINGS: Final = (
    "Unregulated voltage [%]|Compound current share [%]|Excitation ceiling [x rated-load field]"
    "|Exciter time constant [s]|Regulator gain|Regulator integral [1/s]|Regulator derivative [s]"
    "|V/Hz knee [Hz]|Sustained short-circuit current [x In]|Sustained duration [s]"
)
# one line per way of feeding the field, in the order of FIELD_HEADINGS; the knee as a part of rated frequency
FIELDS: Final = {
    "auxiliary winding": "- - 2.2 .12 40 25 .5 .95 3.2 10",
    "permanent magnet": "- - 2.5 .14 50 30 .6 .95 3.3 10",
    "shunt": "- - 2.0 .10 35 20 .4 .95 - -",
    "compounded": "108 60 2.3 .10 30 20 .3 .95 3.5 5",
    "compounded without regulator": "103 62 2.2 - - - - - 3.4 5",
}

# moulded-case breakers limit the current; a sheet for each frame: (kA prospective, kA cut-off peak, A2s)
LET_THROUGH: Final[dict[str, tuple[tuple[float, float, float], ...]]] = {
    "MCB C": ((1, 1.4, 6e3), (3, 3.2, 18e3), (6, 4.5, 35e3), (10, 6.0, 60e3), (15, 7.5, 85e3)),
    "CL 32": (
        (1, 1.4, 8e3),
        (5, 4.5, 40e3),
        (10, 6.0, 60e3),
        (25, 8.0, 80e3),
        (50, 10, 100e3),
        (65, 11, 110e3),
    ),
    "CL 100": (
        (2, 2.9, 30e3),
        (5, 6.5, 120e3),
        (10, 9, 220e3),
        (25, 14, 380e3),
        (50, 18, 550e3),
        (65, 20, 600e3),
    ),
    "CL 160": (
        (2, 2.9, 40e3),
        (5, 7.5, 200e3),
        (10, 12, 400e3),
        (25, 19, 750e3),
        (50, 25, 1.1e6),
        (65, 27, 1.2e6),
    ),
    "CL 250": (
        (3, 4.4, 90e3),
        (5, 8.5, 250e3),
        (10, 15, 600e3),
        (25, 24, 1.3e6),
        (50, 31, 1.9e6),
        (65, 34, 2.1e6),
    ),
    "CL 630": ((5, 9.0, 0.4e6), (10, 17, 1.0e6), (25, 35, 3.2e6), (50, 48, 5.5e6), (65, 54, 6.5e6)),
}
# miniature breaker, band C: (x In, s min, s max); 1.13 and 1.45 In from memory of IEC 60898-1
MCB_C: Final[tuple[tuple[float, float, float | None], ...]] = (
    (1.13, 3600, None),
    (1.45, 300, 3600),
    (2.55, 12, 60),
    (4.99, 3, 15),
    (5.0, 0.005, 14.9),
    (9.99, 0.005, 4),
    (10, 0.005, 0.1),
    (20, 0.005, 0.02),
    (100, 0.003, 0.01),
)

ORDERS: Final = (5, 7, 11, 13, 17, 19, 23, 25)
# per cent of the fundamental: typical, from memory of IEEE 519 and drive handbooks
SPECTRA: Final[dict[str, tuple[float, ...]]] = {
    "Typical 6-pulse": (17.5, 11.0, 4.5, 2.9, 1.5, 1.0, 0.9, 0.8),
    "Typical 6-pulse DC link": (33.0, 13.5, 7.5, 4.0, 2.6, 1.9, 1.4, 1.1),
    "Typical 12-pulse": (2.6, 1.6, 7.3, 5.7, 0.2, 0.1, 2.0, 1.6),
    "Typical 24-pulse": (2.6, 1.6, 0.7, 0.4, 0.2, 0.1, 2.0, 1.6),
    "Typical active front end": (2.0, 1.5, 1.2, 1.0, 0.8, 0.7, 0.6, 0.5),
}


def machine(kind: str) -> Row:
    """Return the machine columns of one type."""
    return dict(zip(MACHINE_HEADINGS.split("|"), map(float, MACHINES[kind].split()), strict=True))


def field(kind: str, frequency_hz: float) -> Row:
    """Return the field columns of one way of feeding it; blanks stay away."""
    pairs = zip(FIELD_HEADINGS.split("|"), FIELDS[kind].split(), strict=True)
    row = {heading: float(word) for heading, word in pairs if word != "-"}
    if "V/Hz knee [Hz]" in row:
        row["V/Hz knee [Hz]"] = round(row["V/Hz knee [Hz]"] * frequency_hz, 1)
    return {"Field supply": kind, **row}


def least_mm2(sheet: str, fault_ka: float) -> float:
    """Return the section that the let-through of a sheet may heat to 250 °C: sqrt(I2t)/143."""
    points = LET_THROUGH[sheet]
    let_through = next((a2s for ka, _, a2s in points if ka >= fault_ka), points[-1][2])
    return float(let_through**0.5 / 143)


def curve_rows() -> list[Row]:
    """Return the rows of the Curves sheet."""
    rows: list[Row] = []
    for current, shortest, longest in MCB_C:
        row: Row = {"Curve": "MCB C", "Current [x In]": current, "Time min [s]": shortest}
        rows.append(row if longest is None else row | {"Time max [s]": longest})
    return rows


def let_through_rows(used: set[str]) -> list[Row]:
    """Return the rows of the Let-through sheet for the curves named."""
    keys = ("Curve", "Prospective current [kA]", "Cut-off peak [kA]", "Let-through I2t [A2s]")
    return [
        dict(zip(keys, (name, *point), strict=True))
        for name, points in LET_THROUGH.items()
        if name in used
        for point in points
    ]


def spectrum_rows(used: set[str]) -> list[Row]:
    """Return the rows of the Spectra sheet for the spectra named."""
    keys = ("Spectrum", "Loading [%]", "Order", "Current [%]")
    return [
        dict(zip(keys, (name, 100, order, current), strict=True))
        for name, currents in SPECTRA.items()
        if name in used
        for order, current in zip(ORDERS, currents, strict=True)
    ]
