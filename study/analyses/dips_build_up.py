"""The voltage of a set alone building up from its residual magnetism, at rated speed."""

from __future__ import annotations

from collections.abc import Sequence

from study.analyses.dips_options import DipOptions
from study.issues import SolveError
from study.model.modes import Event
from study.network.network import ModeNetwork
from study.results.dips import SimulatedCase


def simulate_build_up(at: ModeNetwork, events: Sequence[Event], options: DipOptions) -> SimulatedCase:
    """Simulate."""
    raise SolveError("not yet")
