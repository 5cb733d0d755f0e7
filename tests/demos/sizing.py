"""How the demo vessels' cables and breakers were chosen: the yard's side of the calculation.

Independent of the program under test on purpose, so that a demo does not agree with it by construction.
"""

from __future__ import annotations

from bisect import bisect_left
from math import sqrt

SECTIONS_MM2 = (1.5, 2.5, 4, 6, 10, 16, 25, 35, 50, 70, 95, 120, 150, 185, 240, 300)
# IEC 60228 class 2, plain copper at 20 degC [ohm/km]
RESISTANCE_20C = (
    12.1,
    7.41,
    4.61,
    3.08,
    1.83,
    1.15,
    0.727,
    0.524,
    0.387,
    0.268,
    0.193,
    0.153,
    0.124,
    0.0991,
    0.0754,
    0.0601,
)
REACTANCE_OHM_PER_KM = 0.1
HEATING_90C = 1 + 0.00393 * 70
CORE_FACTOR = {"3 single": 1.0, "2": 0.85, "3": 0.70, "4": 0.70}
FRAMES_A = (6, 10, 16, 20, 25, 32, 40, 50, 63, 80, 100, 125, 160, 200, 250, 320, 400, 500, 630)
FUSES_A = (16, 20, 25, 32, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630)
SUPPLY_BREAKERS_A = (100, 160, 250, 400, 630, 800, 1000, 1250, 1600, 2000, 2500, 3200, 4000)
# full-load efficiency and power factor of 4-pole motors by kW (IE2/IE3 class, common practice)
MOTOR_KW = (0.75, 1.5, 3, 5.5, 7.5, 11, 15, 22, 30, 45, 75, 110, 160, 250)
MOTOR_EFFICIENCY = (0.80, 0.84, 0.87, 0.89, 0.90, 0.91, 0.92, 0.93, 0.935, 0.94, 0.945, 0.95, 0.955, 0.958)
MOTOR_COS_PHI = (0.72, 0.77, 0.80, 0.82, 0.82, 0.83, 0.84, 0.85, 0.86, 0.86, 0.87, 0.88, 0.88, 0.89)


def motor_figures(kw: float) -> tuple[float, float]:
    """Return full-load efficiency and power factor of a motor from the next listed size up."""
    place = min(bisect_left(MOTOR_KW, kw), len(MOTOR_KW) - 1)
    return MOTOR_EFFICIENCY[place], MOTOR_COS_PHI[place]


def line_current_a(kva: float, volts: float, phases: int = 3) -> float:
    """Return the line current [A] of an apparent power."""
    return 1000 * kva / (volts * (sqrt(3) if phases == 3 else 1))


def next_size(amps: float, sizes: tuple[int, ...] = FRAMES_A) -> int:
    """Return the smallest listed rating not below `amps`."""
    for size in sizes:
        if size >= amps:
            return size
    raise ValueError(f"no rating above {amps:.0f} A in the list that ends at {sizes[-1]} A")


def rating_a(section_mm2: float, cores: str, ambient_degc: float, bunched: int) -> float:
    """Return the continuous rating [A] of one run with 90 degC insulation.

    IEC 60092-352 Annex B, I = 17 S^0.625 at 45 degC, corrected by sqrt((90 - Ta)/45); 0.85 in bunches of
    more than six.
    """
    return float(
        17
        * section_mm2**0.625
        * CORE_FACTOR[cores]
        * sqrt((90 - ambient_degc) / 45)
        * (0.85 if bunched > 6 else 1.0)
    )


def drop_percent(amps: float, length_m: float, section_mm2: float, volts: float, phases: int) -> float:
    """Return the fall of voltage [% of nominal] along one run at a power factor of 0.8, at 90 degC."""
    ohm_per_km = RESISTANCE_20C[SECTIONS_MM2.index(section_mm2)] * HEATING_90C
    factor = sqrt(3) if phases == 3 else 2.0
    return factor * amps * length_m / 1000 * (0.8 * ohm_per_km + 0.6 * REACTANCE_OHM_PER_KM) / volts * 100


def choose_cable(
    amps: float,
    volts: float,
    length_m: float,
    *,
    cores: str = "3",
    phases: int = 3,
    ambient_degc: float = 45,
    bunched: int = 6,
    max_drop_percent: float = 3.0,
    least_mm2: float = 1.5,
    drop_amps: float | None = None,
) -> tuple[int, float]:
    """Return runs in parallel and section [mm2] that carry `amps` and hold the fall of voltage."""
    largest = 300 if cores == "3 single" else max(120, least_mm2)
    for runs in range(1, 13):
        for section in SECTIONS_MM2:
            if section < least_mm2 or section > largest or (runs > 1 and section < 50):
                continue
            drop = drop_percent((drop_amps or amps) / runs, length_m, section, volts, phases)
            if runs * rating_a(section, cores, ambient_degc, bunched) >= amps and drop <= max_drop_percent:
                return runs, section
    raise ValueError(f"no cable for {amps:.0f} A over {length_m:.0f} m at {volts:.0f} V")
