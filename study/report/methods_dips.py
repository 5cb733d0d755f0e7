"""The methods of the events in time, one sentence each."""

from __future__ import annotations

DIPS_METHODS: tuple[str, ...] = (
    "Quick estimate of starts: sets as a constant e.m.f. behind Ra + jX'd (X''d in the first cycle), the "
    "motor at standstill behind its cable, the load before as impedance, constant current or constant power.",
    "Events in time: sets as machines of subtransient order with saturation (stator transients left out), "
    "each with its own excitation system, regulator, droop circuit and governor, motors with their "
    "slip, inertia and load torque, other consumers by kind; from the load flow of the mode to the new rest. "
    "What a relay, an overload or a starter does on the way is followed. Voltages are of the positive "
    "sequence and hold from the first cycle on.",
    "Recovery is the time until a quantity stays within its band about the value after; limits of transients "
    "are not applied while a fault lasts, to wrong settings or to the build-up of voltage.",
    "Performance classes of ISO 8528-5 (from memory) are a statement on the event shown, not a certificate "
    "of the set.",
)
