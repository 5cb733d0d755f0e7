"""A few hundred of the cases of tests/benchmarks/fuzz_reader.py; the many thousands are run by hand."""

from __future__ import annotations

import signal

import pytest

from tests.benchmarks.fuzz_reader import SECONDS_PER_CASE, TooSlow, made_case, outcome, run

CASES, ROUNDS = 25, 10


@pytest.mark.skipif(not hasattr(signal, "SIGPROF"), reason="the clock that stops a case is a POSIX matter")
@pytest.mark.parametrize("first", range(0, CASES * ROUNDS, CASES))
def test_whatever_a_file_holds_the_answer_is_one_to_act_on(first: int) -> None:
    ends = {run(number)[0] for number in range(first, first + CASES)}
    assert ends <= {"plant", "faults", "refused"}
    assert len(ends) > 1


def test_a_case_is_the_same_in_every_run() -> None:
    assert made_case(7) == made_case(7) != made_case(8)


def test_a_failure_is_noticed(monkeypatch: pytest.MonkeyPatch) -> None:
    """The check itself: no plant and no fault is no answer."""
    monkeypatch.setattr("tests.benchmarks.fuzz_reader.check_raw", lambda _: (None, ()))
    with pytest.raises(AssertionError):
        all(outcome(made_case(number), graft=False) for number in range(20))


@pytest.mark.skipif(not hasattr(signal, "SIGPROF"), reason="the clock that stops a case is a POSIX matter")
def test_a_hang_is_noticed(monkeypatch: pytest.MonkeyPatch, tmp_path: object) -> None:
    def forever(_: object) -> None:
        while True:
            pass

    monkeypatch.setattr("tests.benchmarks.fuzz_reader.SECONDS_PER_CASE", 0.2)
    monkeypatch.setattr("tests.benchmarks.fuzz_reader.package_from_bytes", forever)
    monkeypatch.setattr("tests.benchmarks.fuzz_reader.tempfile.gettempdir", lambda: str(tmp_path))
    with pytest.raises(TooSlow):
        run(1)
    assert SECONDS_PER_CASE > 1
