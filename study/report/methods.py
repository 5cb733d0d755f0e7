"""The methods used, one sentence or two each: name, standard and clause, range of use."""

from __future__ import annotations

METHODS: tuple[str, ...] = (
    "Load balance: continuous load, plus intermittent load over its diversity or by its service's "
    "simultaneity factor, by mode; occasional load counts with nothing. The alternative takes the largest"
    " intermittent consumer and those sure to run, instead of the diversity (ClassNK-type electric load "
    "analysis). In an emergency mode everything in use counts in full "
    "(SOLAS II-1/42 and 43, from memory). Losses of cables and transformers are not in the balance; the "
    "load flow has them.",
    "Motors at part load: efficiency from the split of losses at which three-quarter and rated load have "
    "the same (IEC 60034-31, from memory); kvar as a constant part and one that goes with the square of "
    "the load (common practice, no source). The load factor refers to the absorbed power where the sheet "
    "gives one.",
    "Load on the sets in the balance: in proportion to rated kW and rated kvar, set powers aside. Rated "
    "kW of a set: the lesser of its rated kVA at rated power factor and its engine power times alternator"
    " efficiency.",
    "Loss of the largest running set, for each island: at once, after each preferential trip, and with "
    "the standby sets started (SOLAS II-1/41.5, from memory). The only set of one of several sections is "
    "judged by the services to propulsion, steering and safety that no other section has.",
    "Any one main set out: load essential to propulsion, steering, safety and habitability against the "
    "other main sets, all of them available and ties closed (SOLAS II-1/41.1.2). Emergency sets never "
    "count in the loss of a set.",
    "Load steps and restart after a blackout: largest load step of each engine, and never beyond 110 % of"
    " its power; consumers come back by their restart delays in steps that the sets that start can take "
    "(SOLAS II-1/41.5.1.1, ClassNK 2.4.2, from memory). Time courses of voltage and speed are not in it.",
    "Load flow: balanced, fundamental frequency, one solution for each island. kW by speed droop and "
    "no-load frequency, losses included; each regulator holds the voltage of its load compensation (IEEE "
    "421.5, clause 4, from memory), either of the current phasor or of the reactive current alone, as the"
    " set's row says. Motors and converters draw constant power, heating and lighting follow the square "
    "of the voltage, general load half and half.",
    "The load flow takes of each consumer what the load balance counts. Consumers' terminals and the "
    "cables that serve one consumer alone are shown and judged while it runs, whatever counts of it.",
    "Voltage droop: fall of terminal voltage from no load to the base named in the workbook, in per cent "
    "of rated voltage; the compensating reactance follows in closed form. The reactance is fictitious and"
    " enters no losses. It stays in force for a set that runs alone, unless the sheet Set-points says 'no"
    " droop' in that mode.",
    "Two solvers: pandapower's Newton solution is reported; our own solution of the same branches with "
    "the sources' laws inside is held against it in every mode. Their agreement proves the algebra, not "
    "the data.",
    "A set that reaches its field ceiling, loses its field, or reaches 110 % of its engine's power is "
    "held there, a converter at its rated current; the others take the rest.",
    "Cables: conductor resistance by IEC 60228 at operating temperature with skin effect, reactance "
    "typical of the section where the maker's is not given; rating by IEC 60092-352 with corrections for "
    "ambient temperature, bunching and duty (from memory); runs in parallel share equally.",
    "Voltage regulation: two-reaction theory with saturation on the direct axis; regulation without droop"
    " from no load to rated load at rated power factor, judged by half its range, the set-point centred. "
    "Load is taken as constant current in these curves.",
    "Sharing: every set from 20 to 100 % of the combined rating at the mode's own power factor, once as "
    "set in the workbook and once with the set-points trimmed to proportional shares at 75 % load "
    "(ClassNK 2.4.14-3), each load solved on the whole network.",
    "Adjusting margins: the network's answer to a small change of one set-point, followed in a straight "
    "line to the first limit at 20 %, at 100 % and at the mode's own load; there the law of the set's own"
    " regulator or governor gives the setting. The fuel limit of the engines is left out, which is on the"
    " safe side.",
    "Maladjusted sets: each event of the workbook solved as a case of its own on the whole network; rows "
    "of one case add up.",
    "Short-circuit currents: IEC 61363-1:1998 governs the duties, with every set that may run in parallel"
    " and its own decay; IEC 60909-0:2016 by nodal reduction stands beside it, and pandapower's IEC 60909"
    " beside that where it is exact. The basis, and how far the figures can be trusted, stands with the "
    "short-circuit tables.",
    "Fault ratings: peak and short-time withstand of boards, making, breaking and short-time ratings of "
    "breakers and fuses (IEC 60947-2, IEC 60269, IEC 62271-100, IEC 61439-1, from memory), heat in cables"
    " until the fault is cleared (IEC 60949, adiabatic), against the greatest duty of each mode. A rating"
    " that is not given is never assumed.",
    "Grading: for every device the fault that it is to clear, from the least at the far end (least sets, hot "
    "cables, no motors; three-phase, and two-phase behind star-delta transformers) to the largest just "
    "behind it (change-over sets, motors, cold cables), on the decaying currents through it and through "
    "every device behind it up to the sources, as the topology of each mode has them. Bands hold all "
    "tolerances; delays are integrated as IEC 60255-151 has it (from memory). An instantaneous stage that "
    "may open is ruled by makers' discrimination and let-through tables alone. Partial discrimination is "
    "found by bisection over the level of the fault. Parallel paths open in turn, the currents of the others "
    "solved again each time.",
    "Not graded: breakers in one circuit with nothing between them, faults of a set among fewer than three, "
    "faults in parallel paths without directional or differential protection, and what converters alone feed "
    "back. Motors' own contributions to faults elsewhere, earth faults and the reacceleration after a fault "
    "are not in it.",
    "Proposed settings: values within the ranges of the sheet, the smallest change first; each is graded "
    "again on all that the setting bears upon, with reach and starts, before it is offered. Overload "
    "settings and the short-time pick-up of sets are never raised. The search is bounded.",
    "What devices must hold: motor starts (typical time where none is given), inrush of transformers, steps "
    "of the restart after a blackout, each against the near end of the bands.",
    "Verdicts are judged on unrounded values. A verdict depends on data where it would turn within the "
    "load-data tolerance of the sheet Acceptance.",
)
