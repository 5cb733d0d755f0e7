"""The methods used, one sentence each: name, standard and clause, range of use."""

from __future__ import annotations

METHODS: tuple[str, ...] = (
    "Load balance: continuous load plus intermittent load over its diversity, by service and mode, with"
    " the alternative of the largest intermittent consumer (ClassNK-type electric load analysis). "
    "Motors take part-load efficiency and power factor at their duty point. Losses of cables and "
    "transformers are not in it; the load flow has them.",
    "Any one main set out: load essential to propulsion, steering, safety and habitability against the "
    "other main sets (SOLAS II-1/41). Emergency sets never count in the loss of a set.",
    "Load flow: balanced, fundamental frequency, one solution for each island. kW by speed droop and "
    "no-load frequency, losses included; each regulator holds the voltage of its load compensation "
    "(IEEE 421.5, clause 4, from memory), either of the current phasor or of the reactive current "
    "alone, as the set's row says.",
    "Voltage droop: fall of terminal voltage from no load to the base named in the workbook, in per "
    "cent of rated voltage; the compensating reactance follows in closed form. The reactance is "
    "fictitious and enters no losses.",
    "Two solvers: pandapower's Newton solution is reported; our own solution of the same branches with "
    "the sources' laws inside is held against it in every mode. Their agreement proves the algebra, not"
    " the data.",
    "A set that reaches its field ceiling or its engine's limit is held there and the others take the rest.",
    "Cables: conductor resistance by IEC 60228 at operating temperature, rating by IEC 60092-352 with "
    "corrections for ambient temperature, bunching and duty (from memory); runs in parallel share "
    "equally.",
    "Voltage regulation: two-reaction theory with saturation on the direct axis; regulation without "
    "droop from no load to rated load at rated power factor. Load is taken as constant current in these"
    " curves.",
    "Sharing: every set from 20 to 100 % of the combined rating at the mode's own power factor, once as"
    " set in the workbook and once trimmed to proportional at 75 % load (ClassNK 2.4.14-3). Adjusting "
    "margins are found on one ideal bus in closed form, shifted by the network's own solution.",
    "Verdicts are judged on unrounded values. A verdict depends on data where it would turn within the "
    "load-data tolerance of the sheet Acceptance.",
)
