"""Time-current sheets against points worked by hand."""

from __future__ import annotations

import numpy as np
import pytest

from study.analyses.time_current import time_current_sheets
from study.formulas.trip_band import TripBand
from study.formulas.trip_law import Edge
from study.results.grading import GradingPath, GradingStations
from study.results.time_current import TimeCurrentSheet


def _stage(at_a: float, time_s: float) -> Edge:
    return Edge(stage="short-time", law="constant", from_a=at_a, setting_a=at_a, figures=(time_s,))


def _path(mode: str, largest_a: float) -> GradingPath:
    return GradingPath(
        mode=mode,
        zone="pump",
        source="G1",
        stations=(0, 1),
        largest_a=(largest_a, 4000.0 * largest_a / 8000.0),
        least_a=(2000.0, 1000.0),
    )


@pytest.fixture(scope="module")
def sheets() -> tuple[TimeCurrentSheet, ...]:
    """Return the sheets of two modes with one chain: a 400 V feeder behind an 800/400 V transformer."""
    stations = GradingStations(
        names=("Q1", "Q2"),
        set_at=("Q1", "Q2"),
        unknown=("", ""),
        devices=(("Q1",), ("Q2",)),
        equipment=("pump", "T1"),
        boards=("LV", "MV"),
        u_nominal_v=np.array([400.0, 800.0]),
    )
    bands = {
        "Q1": TripBand(earliest=(_stage(90.0, 0.1),), latest=(_stage(110.0, 0.2),)),
        "Q2": TripBand(earliest=(_stage(180.0, 0.4),), latest=(_stage(220.0, 0.5),)),
    }
    return time_current_sheets([_path("sea", 4000.0), _path("harbour", 8000.0)], stations, bands)


def test_equal_chains_share_the_sheet_of_the_largest_fault(sheets: tuple[TimeCurrentSheet, ...]) -> None:
    assert [sheet.mode for sheet in sheets] == ["harbour"]
    assert [band.device for band in sheets[0].bands] == ["Q1", "Q2"]


def test_bands_pass_through_the_points_worked_by_hand(sheets: tuple[TimeCurrentSheet, ...]) -> None:
    """180 A at 800 V is 180 x 800/400 = 360 A at 400 V; equal power, by hand."""
    sheet = sheets[0]
    for band, early_a, late_a, times_s in zip(
        sheet.bands, (90.0, 360.0), (110.0, 440.0), ((0.1, 0.2), (0.4, 0.5)), strict=True
    ):
        np.testing.assert_array_equal(np.isfinite(band.earliest_s), sheet.current_a >= early_a)
        np.testing.assert_array_equal(np.isfinite(band.latest_s), sheet.current_a >= late_a)
        np.testing.assert_allclose([band.earliest_s[-1], band.latest_s[-1]], times_s)
    np.testing.assert_allclose(sheet.largest_a, [8000.0, 8000.0])
    np.testing.assert_allclose(sheet.least_a, [2000.0, 2000.0])


def test_currents_span_half_the_least_setting_to_the_largest_fault(
    sheets: tuple[TimeCurrentSheet, ...],
) -> None:
    """The trial currents are 400 over five decades: 3 % apart, so half of 90 A is met within 3 %."""
    current_a = sheets[0].current_a
    assert len(current_a) == 80
    assert current_a[0] == pytest.approx(45.0, rel=0.03)
    assert current_a[-1] == pytest.approx(8000.0)
