"""Band C of miniature breakers, IEC 60898-1, table 7, from memory: the curve of the demo vessels keeps to it.

No trip at 1.13 In within 1 h, trip at 1.45 In within 1 h, at 2.55 In within 1 to 60 s (up to 32 A), no sooner
than 0.1 s at 5 In, within 0.1 s at 10 In. The figures are bounds; band C begins its instantaneous trip at
just above 5 In, so that the lower edge is looked at just below.
"""

from __future__ import annotations

import pytest

from study.analyses.protection_devices import protection_devices
from study.formulas.trip_band import TripBand
from study.model.protection import CurvePoint
from tests import plants
from tests.demos.catalogue import MCB_C

RATED_A = 16.0


@pytest.fixture(scope="module")
def band() -> TripBand:
    points = [
        CurvePoint(curve="C", cell="", current_in=amps, current_a=None, time_min_s=least, time_max_s=most)
        for amps, least, most in MCB_C
    ]
    device = plants.device("Q1", "C1", i_rated_a=RATED_A, curve="C")
    return protection_devices(plants.plant(devices=[device], curves=points))[0].band


@pytest.mark.parametrize(("multiple", "least_s"), [(1.13, 3600.0), (2.55, 1.0), (4.98, 0.1)])
def test_no_trip_before(band: TripBand, multiple: float, least_s: float) -> None:
    assert band.release_s(multiple * RATED_A) >= least_s * (1.0 - 1e-9)


@pytest.mark.parametrize(("multiple", "most_s"), [(1.45, 3600.0), (2.55, 60.0), (10.0, 0.1), (20.0, 0.1)])
def test_trip_within(band: TripBand, multiple: float, most_s: float) -> None:
    assert band.latest_s(multiple * RATED_A) <= most_s * (1.0 + 1e-9)
