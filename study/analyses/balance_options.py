"""What the Acceptance sheet says about the load balance."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class BalanceOptions:
    """Choices of the load balance, with the values used where the project says nothing.

    Attributes
    ----------
    intermittent_diversity : float
        Sum of the intermittent loads over the largest demand they make together, 1 or more; 2 is the low end
        of the usual 2 to 3 (ClassNK-type electric load analysis).
    one_set_margin : float
        Part of the rating that the fewest sets leave free, 0 to below 1.
    emergency_hours : float
        Hours that the emergency source has to last (SOLAS II-1/43, cargo ships: 18 h).
    emergency_basis : str
        Rule behind the hours.
    blackout_start_s : float
        Time within which a set has to be on the board (SOLAS II-1/42, 43: 45 s).
    restart_interval_s : float
        Least time between two restart steps: the recovery time of the speed (ClassNK 2.4.2: 5 s).

    Raises
    ------
    ValueError
        A diversity below 1, or a margin outside 0 to 1.
    """

    intermittent_diversity: float = 2.0
    one_set_margin: float = 0.0
    emergency_hours: float = 18.0
    emergency_basis: str = "SOLAS II-1/43, cargo ships"
    blackout_start_s: float = 45.0
    restart_interval_s: float = 5.0

    def __post_init__(self) -> None:
        if not self.intermittent_diversity >= 1.0:
            raise ValueError(
                f"intermittent diversity is {self.intermittent_diversity:g}; it is the sum of the loads over "
                "their largest demand together, 1 or more"
            )
        if not 0.0 <= self.one_set_margin < 1.0:
            raise ValueError(f"one-set margin is {self.one_set_margin:g}; give a fraction from 0 to below 1")
