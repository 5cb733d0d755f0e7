"""Built-in limits against their sources, and what the Acceptance sheet may change."""

from __future__ import annotations

import pytest

from study.checks.limits import limits_in_force
from study.limits import BUILT_IN
from study.model.plant import AcceptanceItem


def an_item(quantity: str, limit: float | str, unit: str = "%", basis: str = "") -> AcceptanceItem:
    return AcceptanceItem(quantity=quantity, limit=limit, unit=unit, basis=basis, cell="Acceptance!B5")


@pytest.mark.parametrize(
    ("key", "number"),
    [
        # IACS UR E10 Rev.10 item 4: power-supply variations of type tests, +6/-10 % and +/-5 %
        ("voltage_high", 6.0),
        ("voltage_low", 10.0),
        ("frequency_deviation", 5.0),
        # ClassNK 2.4.14-2 and JEM 1274: +/-2.5 % main, +/-3.5 % emergency
        ("regulation_main", 2.5),
        ("regulation_emergency", 3.5),
        # ClassNK 2.4.2: permanent speed variation 5 %
        ("speed_variation", 5.0),
        # ClassNK 2.4.14-3: 15 % of the largest set's rated kW, 20 to 100 % of the sum of ratings
        ("kw_sharing_largest", 15.0),
        # class rule as quoted in examination texts: 10 % of the largest set's rated kvar
        ("kvar_sharing_largest", 10.0),
        # IEC 60092-301, from memory: 25 % alternatives
        ("kw_sharing_own", 25.0),
        ("kvar_sharing_smallest", 25.0),
        # IEC 60092-201 and -352, from memory
        ("cable_drop", 6.0),
        # SOLAS II-1/43: 18 h, 45 s
        ("emergency_duration", 18.0),
        ("emergency_start", 45.0),
        # IACS UR E24 Rev.1
        ("thd", 8.0),
        # IEC 60364-4-43 cl. 433.1 and SOLAS II-1/30, both from memory
        ("cable_overload_trip", 145.0),
        ("steering_overload", 200.0),
        # ClassNK 2 to 15 % and about 10 s; ABS 4-8-2/9.11 115 % of full load
        ("reverse_power_least", 2.0),
        ("reverse_power_most", 15.0),
        ("reverse_power_delay", 10.0),
        ("set_long_time", 115.0),
        # class practice and IACS UR E13, from memory
        ("undervoltage_least", 35.0),
        ("undervoltage_most", 70.0),
        ("set_overload_time", 120.0),
        # examination texts: 95 to 110 % of rated current, up to 15 s
        ("preferential_least", 95.0),
        ("preferential_most", 110.0),
        ("preferential_delay", 15.0),
    ],
)
def test_a_built_in_limit_is_that_of_its_source(key: str, number: float) -> None:
    assert BUILT_IN[key].limit == number


def test_every_limit_states_its_basis_and_lies_within_its_own_bounds() -> None:
    for spec in BUILT_IN.values():
        assert spec.basis
        if isinstance(spec.limit, float):
            assert spec.minimum <= spec.limit <= spec.maximum
        else:
            assert spec.limit in spec.choices


def test_a_changed_limit_is_marked_wherever_it_is_used() -> None:
    limits = limits_in_force([an_item("voltage  BELOW", 8.0, basis="owner's specification 3.2")])
    assert limits.fraction("voltage_low") == pytest.approx(0.08)
    assert limits.basis("voltage_low") == "agreed for this project: owner's specification 3.2"
    assert limits.by_key["voltage_low"].cell == "Acceptance!B5"


def test_the_same_value_is_no_change() -> None:
    limits = limits_in_force([an_item("Voltage below", 10.0, basis="as the rules")])
    assert limits.basis("voltage_low") == BUILT_IN["voltage_low"].basis


def test_per_unit_is_taken_as_per_cent() -> None:
    assert limits_in_force([an_item("Close margin", 0.1, unit="pu")]).fraction("close_margin") == 0.1


def test_a_choice_keeps_the_sheet_s_own_words() -> None:
    limits = limits_in_force([an_item("Voltage reference", "Nominal of BOARD", unit="")])
    assert limits.text("voltage_reference") == "nominal of board"


def test_a_changed_limit_does_not_borrow_the_rule_s_name() -> None:
    """A rule that says 15 % is no basis for an agreed 20 %."""
    limits = limits_in_force([an_item("kW sharing, of largest set", 20.0)])
    assert (
        limits.basis("kw_sharing_largest") == "agreed for this project: no basis is given; built in is 15 %"
    )
    limits = limits_in_force([an_item("Voltage reference", "nominal of board", unit="")])
    assert limits.basis("voltage_reference").endswith("built in is rated voltage of consumer")
