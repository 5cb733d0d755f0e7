"""The methods behind cables and the sets' protection, one sentence each."""

from __future__ import annotations

PROTECTION_METHODS: tuple[str, ...] = (
    "Cables: load by the load flow, no less than the rated current of what is served; setting or rating of "
    "the device that trips first and the current that trips it for certain against the rating "
    "(IEC 60364-4-43 cl. 433.1, IEC 60092-202, from memory). Steering gear and fire pumps have short-circuit "
    "protection alone (SOLAS II-1/30).",
    "Cables in a short circuit: every fault from the near end to the far end, those just below a pick-up "
    "included, on its decaying current until the arc is out at the latest, against k²S² (IEC 60949, "
    "adiabatic, no longer than 5 s).",
    "Smallest sections: rating, short circuit and voltage drop together, number of runs, way of laying and "
    "devices kept; a proposal, never applied by itself.",
    "Protection of the sets: pick-ups and delays against the usual ranges on board ship, which are limits of "
    "the sheet Acceptance; instantaneous stages against the set's own contribution.",
)
