"""Heat of a falling current against numerical integration and the closed form; instants against formulas."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import quad

from study.analyses.fault_ratings_history import Histories, case_histories, knots_s
from study.formulas.fault_current import FaultCurrent, joule_integral_a2s
from study.results.short_circuit import FaultCase
from tests.analyses.made_up_short_circuit import Feed, Place, Source, fault_case, places

F_HZ = 60.0


def drawn(seed: int) -> tuple[list[Source], list[Feed]]:
    """Return sets, motors and a converter that blocks, drawn within the bands of ship plants."""
    draw = np.random.default_rng(seed)
    sources, feeds = [], []
    for k in range(int(draw.integers(1, 5))):
        initial = draw.uniform(2e3, 12e3)
        name = f"G{k}"
        sources.append(Source(name=name))
        feeds.append(
            Feed(
                place="MSB", source=name, initial_a=initial, transient_a=initial * draw.uniform(0.4, 0.8),
                sustained_a=initial * draw.uniform(0.0, 0.4), t_sub_s=draw.uniform(0.005, 0.03),
                t_trans_s=draw.uniform(0.05, 2.0), t_dc_s=draw.uniform(0.005, 0.1),
            )
        )  # fmt: skip
    sources += [Source(name="M", kind="small motors"), Source(name="B", kind="converter supply", ends_s=0.3)]
    feeds += [
        Feed(place="MSB", source="M", initial_a=draw.uniform(100.0, 4e3), transient_a=0.0, t_dc_s=0.012),
        Feed(place="MSB", source="B", initial_a=draw.uniform(100.0, 2e3), dc_a=0.0),
    ]
    return sources, feeds


def history(case: FaultCase) -> Histories:
    nobody = np.zeros((1, len(case.sources.names)))
    return case_histories(case, np.array([0]), nobody, knots_s(F_HZ, case.parts.ends_s))[0]


@pytest.mark.parametrize("seed", range(12))
@pytest.mark.parametrize("duration_s", [0.015, 0.06, 0.28, 0.3, 1.0, 3.0])
def test_heat_against_numerical_integration(seed: int, duration_s: float) -> None:
    sources, feeds = drawn(seed)
    case = fault_case(places(Place(name="MSB")), sources, feeds, f_hz=F_HZ)

    def square(t: float) -> float:
        on = [f for f in feeds if f.source != "B" or t < 0.3]
        return sum(f.ac_a(t) for f in on) ** 2 + sum(f.direct_a(t) for f in on) ** 2

    numerical = sum(
        quad(square, a, min(b, duration_s), limit=400, epsrel=1e-10)[0]
        for a, b in ((0.0, 0.02), (0.02, 0.1), (0.1, 0.3), (0.3, 10.0))
        if a < duration_s
    )
    # Simpson's rule on steps of a third of the time: measured worst of 40 such plants 5e-5 of the heat.
    assert history(case).heat_a2s(np.array([duration_s]))[0] == pytest.approx(numerical, rel=1e-4)


def test_heat_against_the_closed_form_of_exponentials() -> None:
    sources, feeds = drawn(99)
    feeds = [f for f in feeds if f.source != "B"]
    case = fault_case(places(Place(name="MSB")), sources[:-1], feeds, f_hz=F_HZ)
    parts = case.parts
    names = ("subtransient_a", "transient_a", "sustained_a", "dc_a", "t_sub_s", "t_trans_s", "t_dc_s")
    exact = joule_integral_a2s(FaultCurrent(**{n: getattr(parts, n)[0] for n in names}), 1.0)
    assert history(case).heat_a2s(np.array([1.0]))[0] == pytest.approx(float(exact), rel=1e-4)


def test_a_steady_current_has_the_heat_of_its_square() -> None:
    feed = Feed(place="MSB", source="G", initial_a=10_000.0, dc_a=0.0)
    case = fault_case(places(Place(name="MSB")), [Source(name="G")], [feed])
    heat = history(case).heat_a2s(np.array([0.27]))[0]
    assert heat == pytest.approx(1e8 * 0.27, rel=1e-12)


@pytest.mark.parametrize("time_s", [1.0 / 120.0, 0.0483, 0.2999, 0.3001, 0.5, 2.0])
def test_instants_against_the_formulas(time_s: float) -> None:
    sources, feeds = drawn(5)
    case = fault_case(places(Place(name="MSB")), sources, feeds, f_hz=F_HZ)
    on = [f for f in feeds if f.source != "B" or time_s < 0.3]
    at = np.array([time_s])
    # A few exponentials together between the points of a step: measured worst 1e-3.
    assert history(case).ac_at_a(at)[0] == pytest.approx(sum(f.ac_a(time_s) for f in on), rel=2e-3)
    direct = sum(f.direct_a(time_s) for f in on)
    assert history(case).dc_at_a(at)[0] == pytest.approx(direct, rel=5e-3, abs=1.0)


def test_a_part_and_the_rest_make_the_whole() -> None:
    sources, feeds = drawn(7)
    case = fault_case(places(Place(name="MSB")), sources, feeds, f_hz=F_HZ)
    share = np.linspace(0.0, 1.0, len(sources))[None]
    knots = knots_s(F_HZ, case.parts.ends_s)
    whole, part = case_histories(case, np.array([0]), share, knots)
    rest = case_histories(case, np.array([0]), 1.0 - share, knots)[1]
    assert part.ac_a + rest.ac_a == pytest.approx(whole.ac_a, rel=1e-12)
    assert whole.less(part).dc_a == pytest.approx(rest.dc_a, rel=1e-9, abs=1e-6)


def test_no_place_is_no_current() -> None:
    sources, feeds = drawn(3)
    case = fault_case(places(Place(name="MSB")), sources, feeds)
    whole, part = case_histories(
        case, np.array([-1]), np.ones((1, len(sources))), knots_s(F_HZ, case.parts.ends_s)
    )
    assert not whole.ac_a.any()
    assert not part.dc_a.any()
