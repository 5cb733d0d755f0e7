"""What a short-circuit study may be asked to do differently."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True, slots=True, kw_only=True)
class ShortCircuitOptions:
    """Choices of the study.

    ``parting_s`` are the instants for which the direct component is reported; ``delay_s`` the minimum time
    delay of the breaking current of IEC 60909 and ``duration_s`` that of its thermal equivalent.
    ``lv_tolerance_percent`` chooses the voltage factors of IEC 60909 (6 or 10). ``compare`` runs pandapower
    beside our own IEC 60909.
    """

    parting_s: tuple[float, ...] = (0.03, 0.05, 0.08, 0.1)
    delay_s: float = 0.05
    duration_s: float = 1.0
    lv_tolerance_percent: Literal[6, 10] = 6
    compare: bool = True
