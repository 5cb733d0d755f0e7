"""What the short-circuit study takes for granted, and how far its figures can be trusted."""

from __future__ import annotations

from typing import Final

KNOWN_BIAS: Final = "{known bias}"
"""Stands in the text for the measured bands, which the result holds."""

SHORT_CIRCUIT_BASIS: Final[tuple[tuple[str, str], ...]] = (
    (
        "Fault and standards",
        "Bolted fault of all three phases at once, without arc, contact or busbar resistance. IEC "
        "61363-1:1998 governs the duties; IEC 60909-0:2016 for the same places and modes stands beside it.",
    ),
    (
        "Maximum case",
        "Every set that may run in parallel, change-over included, and every motor in use. Sets at rated "
        "load before the fault, reactances at the low end of their tolerance, cables cold (20 °C). The "
        "values without the tolerance are given as nominal.",
    ),
    (
        "Minimum case",
        "The sets that the mode runs, no motors, no load before the fault, reactances at the high end of "
        "their tolerance, conductors at the temperature at the end of a fault. The least of the "
        "three-phase, the two-phase and, where the neutral is earthed, the line-to-earth fault. The fewest "
        "sets of a mode are taken as those that it runs: give a mode of its own to every smaller number of "
        "sets that the vessel is operated with.",
    ),
    (
        "One set left",
        "Beside the minimum: what the single supply gives that keeps up least (then gives least) of those "
        "that the mode runs in an island, as after the loss of all others. It is shown for boards and "
        "devices and judges nothing, since the vessel is not operated like that.",
    ),
    (
        "Sustained current",
        "That of the maker, by kind of excitation and for as long as the workbook says. Where it is not "
        "given, the ceiling of the field stands in for the maximum and the field of no load for the minimum; "
        "what hangs on it for longer than 0.1 s is not assessed. A set that feeds its field from its own "
        "terminals keeps up nothing at its board. Where motors share a feeder with sets, these give more as "
        "the motors die away: a row of its own, taken over from motors, nothing at first and rising.",
    ),
    (
        "Addition of sources",
        "Every source keeps its own decay. Contributions are added as magnitudes, each at the same "
        "instant, as the standard does; that is a little high.",
    ),
    (
        "Motors",
        "Motors above 100 kW one by one; those up to 100 kW of a board as one motor with typical data and no "
        "load before the fault. Drives that cannot return power give nothing.",
    ),
    (
        "Converter and shore supplies",
        "A converter supply is a limited current for as long as its row says, without direct component. A "
        "shore supply has the fault level of its row and does not decay.",
    ),
    (
        "Closed ties and parallel paths",
        "Sections joined by closed ties without impedance are one busbar. IEC 61363-1 is for systems without "
        "meshes: where a source reaches a place by parallel paths, nodal reduction is used and the row is "
        "marked as outside the standard's scope.",
    ),
    (
        "Known bias of the method",
        "ip = √2 Iac(T/2) + idc(T/2). Held against a simulation of all windings of the machines, loaded "
        f"before the fault, the formulas lie off by: {KNOWN_BIAS}. The peak comes before half a cycle, the "
        "more so behind resistance: the greatest peak over all times and angles of the voltage is therefore "
        "given beside ip, and the larger of both is held against a board's withstand.",
    ),
    (
        "Time simulation",
        "A row of kind fault on the sheet Events is simulated in every run: sets and motors with all their "
        "windings, coupled, at the worst point of the wave, beside both standards.",
    ),
    (
        "Range of time",
        "IEC 61363-1 is good for the first 100 ms; for longer only on the board that the sets feed directly. "
        "Sustained currents are given twice: the low estimate for the reach of protection, the high estimate "
        "for the heating of cables and boards.",
    ),
    (
        "Text of the standards",
        "The formulas of IEC 61363-1 and IEC 60909-0 are written from memory of the standards. Those of "
        "IEC 60909-0 are held to the example networks of IEC TR 60909-4, those of IEC 61363-1 to a "
        "simulation of the machines. Compare with a bought copy before a figure decides an order.",
    ),
    (
        "IEC 60909 columns",
        "Peaks by method C (equivalent frequency), impedances without the regulators' droop. The factor λ is "
        "left out: Ik is the current without motors that the same impedances would let through.",
    ),
    (
        "Quick estimates",
        "Multiples of rated current from rules and law. They show whether a result has the right size, and "
        "judge nothing.",
    ),
)
