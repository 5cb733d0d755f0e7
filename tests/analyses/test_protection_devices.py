"""Rows of the sheet Devices as bands: every column has its effect, every blank is absent or unknown."""

from __future__ import annotations

import numpy as np
import pytest

from study.analyses.protection_devices import (
    DeviceModel,
    device_model,
    device_surroundings,
    protection_devices,
)
from study.formulas.operate_state import CurrentHistory, operate, time_grid_s
from study.model.protection import CurvePoint, Device, LetThroughPoint, ProtectionFunction
from tests import plants

ELECTRONIC = {
    "i_rated_a": 400.0,
    "long_time_a": 300.0,
    "long_time_delay_s": 10.0,
    "long_time_delay_at": 6.0,
    "short_time_a": 1500.0,
    "short_time_delay_s": 0.2,
    "instantaneous_a": 6000.0,
}


def one(*devices: Device, **sheets: object) -> DeviceModel:
    return protection_devices(plants.plant(devices=list(devices), **sheets))[0]


def breaker(**changes: object) -> DeviceModel:
    return one(plants.device("Q1", "C1", **(ELECTRONIC | changes)))


def test_a_breaker_with_every_stage() -> None:
    # 10 % on currents and times, 0.02 s to open, 0.05 s to break: by hand from the settings.
    band = breaker().band
    early, late = band.times_s([300.0, 350.0, 900.0, 1400.0, 1700.0, 5500.0, 6700.0])
    assert np.isinf(early[0])
    assert np.isinf(late[:2]).all()
    assert early[1] == pytest.approx(0.9 * 360.0 / (350.0 / 300.0) ** 2 + 0.02)
    assert (early[2], late[2]) == (pytest.approx(0.9 * 40.0 + 0.02), pytest.approx(1.1 * 40.0 + 0.05))
    assert early[3] == pytest.approx(0.18 + 0.02)
    assert late[4] == pytest.approx(0.22 + 0.05)
    assert (early[5], late[5]) == (pytest.approx(0.02), pytest.approx(0.27))
    assert late[6] == pytest.approx(0.05)
    assert not band.unknown


def test_laws_and_senses_have_their_effect() -> None:
    slow = breaker(long_time_law="I4t").band.latest_s(900.0)
    assert slow == pytest.approx(1.1 * 10.0 * 2.0**4 + 0.05)
    ramp = breaker(short_time_law="I2t").band.latest_s(1700.0)
    assert ramp == pytest.approx(0.22 * (3000.0 / 1700.0) ** 2 + 0.05)
    seen = {senses: breaker(instantaneous_senses=senses).band.earliest[-1].sees for senses in ("rms", "peak")}
    assert seen == {"rms": "symmetrical", "peak": "peak"}


@pytest.mark.parametrize(
    ("blank", "words"),
    [
        ({"long_time_delay_s": None}, "long-time delay"),
        ({"short_time_delay_s": None}, "short-time delay"),
        ({"instantaneous_a": None}, "instantaneous current"),
        ({"long_time_a": None, "short_time_a": None, "instantaneous_a": None}, "no setting"),
        ({"relay_curve": "very inverse"}, "time multiplier"),
        ({"relay_curve": "definite time", "long_time_delay_s": None}, "delay of the definite-time relay"),
    ],
)
def test_a_blank_that_is_needed_makes_the_edge_unknown_and_says_so(
    blank: dict[str, object], words: str
) -> None:
    model = breaker(**blank)
    assert any(words in note for note in model.band.unknown)
    assert set(model.band.unknown) <= set(model.notes)
    assert np.isnan(model.band.release_s(2000.0))


def test_a_stage_that_is_off_or_absent_is_no_unknown() -> None:
    assert not breaker(instantaneous_a=None, instantaneous_off=True).band.unknown
    magnetic = breaker(long_time_a=None, short_time_a=None)
    assert not magnetic.band.unknown
    assert np.isnan(magnetic.overload_a)
    assert np.isinf(magnetic.band.latest_s(5000.0))


def test_a_relay_opens_the_breaker_that_has_no_settings() -> None:
    relay = {
        "kind": "overcurrent relay",
        "long_time_a": 500.0,
        "relay_curve": "very inverse",
        "time_multiplier": 0.4,
    }
    timing = {"opening_time_min_s": 0.0, "breaking_time_max_s": 0.0, "time_tolerance": 0.05}
    found = one(
        plants.device("Q1", "C1", end="MSB", breaking_time_max_s=0.08),
        plants.device("R1", "C1", end="MSB", current_tolerance=0.0, direction="forward", protected_zone="MSB",
                      ct_primary_a=600.0, ct_secondary_a=1.0, **relay, **timing),
        protection_functions=[
            ProtectionFunction(name="87", equipment="C1", cell="", kind="differential", pick_up=20.0,
                               unit="%", delay_s=0.05, trips="Q9, Q1")
        ],
    )  # fmt: skip
    assert (found.name, found.opened_by, found.direction, found.zone) == ("Q1", "R1", "forward", "MSB")
    assert found.differential == ("87",)
    # 5 times the setting: 0.4 x 13.5/4 = 1.35 s; settings are primary ampere whatever the transformer.
    assert found.band.latest_s(2500.0) == pytest.approx(1.05 * 1.35 + 0.08)
    assert found.overload_a == 500.0


def test_a_relay_resets_by_the_law_only_where_its_curve_has_one() -> None:
    relay = {"kind": "overcurrent relay", "time_multiplier": 0.5}
    ieee = breaker(**relay, relay_curve="IEEE very inverse", reset="IEEE curve").band.earliest[0]
    assert (ieee.memory, ieee.reset_s) == ("decays", pytest.approx(0.5 * 21.6))
    plain = breaker(**relay, relay_curve="very inverse", reset="definite 0 s")
    assert plain.band.earliest[0].memory == "resets"
    assert any("reset at once" in note for note in plain.notes)


def test_directions_that_are_no_direction_are_said() -> None:
    assert any("neither forward nor reverse" in note for note in breaker(direction="north").notes)
    assert breaker(direction=" Reverse ").direction == "reverse"


def test_fuses_by_their_gates_or_unknown() -> None:
    fuse = {"kind": "fuse", "i_rated_a": 100.0}
    gg = one(plants.device("S1", "C1", fuse_class="gG", **fuse))
    assert (gg.overload_a, gg.conventional_a) == (100.0, pytest.approx(160.0))
    assert gg.band.latest_s(1450.0) == pytest.approx(0.1)
    motor = one(plants.device("S1", "C1", fuse_class="aM", **fuse))
    assert np.isnan(motor.overload_a)
    for changes in ({}, {"fuse_class": "gG", "i_rated_a": 110.0}):
        unknown = one(plants.device("S1", "C1", **(fuse | changes)))
        assert unknown.band.unknown
        assert np.isnan(unknown.band.latest_s(1000.0))


def test_overload_relays_by_class() -> None:
    relay = one(
        plants.device(
            "F1", "Pump", kind="thermal overload", i_rated_a=50.0, long_time_a=40.0, trip_class="20"
        )
    )
    assert (relay.overload_a, relay.conventional_a) == (40.0, pytest.approx(48.0))
    # 20 s of class 20 at 7.2 times, and 0.1 s for the contactor.
    assert relay.band.latest_s(7.2 * 40.0) == pytest.approx(20.1)
    assert one(plants.device("F1", "Pump", kind="thermal overload", long_time_a=40.0)).band.unknown


MINIATURE = [
    (1.13, 3600.0, None),
    (1.45, 300.0, 3600.0),
    (5.0, 0.01, 14.0),
    (10.0, 0.005, 0.1),
    (50.0, 0.003, 0.01),
]


def curve(points: list[tuple[float, float | None, float | None]]) -> list[CurvePoint]:
    return [
        CurvePoint(curve="MCB", cell="", current_in=amps, current_a=None, time_min_s=least, time_max_s=most)
        for amps, least, most in points
    ]


def test_a_makers_curve_is_interpolated_and_never_extrapolated_silently() -> None:
    model = one(plants.device("Q1", "C1", i_rated_a=16.0, curve="MCB"), curves=curve(MINIATURE))
    band = model.band
    assert band.times_s(80.0)[1] == pytest.approx(14.0)
    # Between two points the line is straight in double-logarithmic scale: 7.07 In lies half way from 5 to 10.
    assert band.latest_s(16.0 * 50.0**0.5) == pytest.approx((14.0 * 0.1) ** 0.5, rel=1e-9)
    assert np.isinf(band.latest_s(1.4 * 16.0))
    # Beyond the last point: no sooner than at once, no later than its last time.
    early, late = band.times_s(2000.0)
    assert early < 1e-5
    assert late == pytest.approx(0.01)
    assert any("ends at 800 A" in note for note in model.notes)
    # 1.45 In is the current that trips a miniature breaker within the hour (IEC 60898-1, from memory).
    assert (model.overload_a, model.conventional_a) == (16.0, pytest.approx(1.45 * 16.0))


def test_a_curve_without_one_side_leaves_that_side_unknown() -> None:
    only_longest = [(amps, None, most) for amps, _, most in MINIATURE if most is not None]
    band = one(plants.device("Q1", "C1", i_rated_a=16.0, curve="MCB"), curves=curve(only_longest)).band
    assert np.isnan(band.release_s(200.0))
    assert band.latest_s(160.0) == pytest.approx(0.1)
    assert "shortest" in band.unknown[0]


def test_a_curve_in_ampere_that_begins_fast_may_open_from_the_rated_current_up() -> None:
    points = [
        CurvePoint(curve="MCB", cell="", current_in=None, current_a=a, time_min_s=t, time_max_s=2.0 * t)
        for a, t in ((100.0, 5.0), (1000.0, 0.02))
    ]
    band = one(plants.device("Q1", "C1", i_rated_a=20.0, curve="MCB"), curves=points).band
    assert np.isinf(band.release_s(19.0))
    assert band.release_s(50.0) == pytest.approx(5.0)
    assert np.isinf(band.latest_s(99.0))


def test_let_through_and_ranges_come_along() -> None:
    plant = plants.plant(
        devices=[plants.device("Q1", "C1", curve="CL", **ELECTRONIC)],
        let_through=[
            LetThroughPoint(
                curve="CL", cell="", prospective_ka=ka, cut_off_peak_ka=ka, let_through_a2s=ka * 1e5
            )
            for ka in (1.0, 10.0)
        ],
    )
    surroundings = device_surroundings(plant)
    model = device_model(plant.devices[0], surroundings)
    assert model.let_through is not None
    assert model.let_through.heat_at_a2s(np.array([10_000.0]))[0] == pytest.approx(1e6)
    assert model.band == protection_devices(plant)[0].band


def test_an_earth_fault_stage_is_a_band_of_its_own() -> None:
    model = breaker(earth_fault_a=20.0, earth_fault_delay_s=0.4)
    assert model.earth is not None
    assert model.earth.latest_s([20.0, 25.0]).tolist() == [np.inf, pytest.approx(0.44 + 0.05)]
    assert breaker().earth is None
    unknown = breaker(earth_fault_a=20.0).earth
    assert unknown is not None
    assert unknown.unknown


def test_the_band_of_a_row_operates_on_a_decaying_current() -> None:
    # 4000 A falling to 1000 A: the short-time stage (1650 A, 0.22 s) sees enough until 0.35 s and trips;
    # with 0.4 s of delay it does not, and the long-time stage ends the fault.
    grid = time_grid_s(0.01, 600.0)
    falls = 1000.0 + 3000.0 * np.exp(-grid / 0.23)
    fast, slow = (breaker(short_time_delay_s=delay).band for delay in (0.2, 0.4))
    history = CurrentHistory(time_s=grid, ac_a=np.stack([falls, falls]), dc_a=np.zeros((2, len(grid))))
    found = operate([fast, slow], history, 0.01)
    assert found.latest_s[0] == pytest.approx(0.27)
    assert found.latest_stage == ("short-time", "long-time")
    # 1.1 x 360 s (300/1000)² = 35.6 s at 1000 A, less what the first second of higher current adds.
    assert 30.0 < found.latest_s[1] < 35.7
