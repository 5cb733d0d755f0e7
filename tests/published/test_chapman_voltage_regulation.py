"""Terminal voltage and regulation of a round-rotor generator at three power factors.

Source: S. J. Chapman, Electric Machinery Fundamentals, example of a 480 V, 60 Hz, star-connected, six-pole
generator, synchronous reactance 1.0 ohm a phase, full load 60 A, 277 V a phase at no load. From memory of the
book. Printed: 236.8 V, 270.4 V and 308.8 V a phase at 0.8 lagging, unity and 0.8 leading; regulation 17.1 %,
2.6 % and -10.3 %.
"""

import numpy as np
import pytest

from study.formulas.synchronous import (
    Machine,
    field_required,
    open_circuit_voltage,
    terminal_voltage_at_field,
)

PHASE_V, CURRENT_A = 277.0, 60.0
X_PU = 1.0 / (PHASE_V / CURRENT_A)
MACHINE = Machine(xd_pu=X_PU, xq_pu=X_PU, xd_transient_pu=0.2 * X_PU)

CASES = [(np.arccos(0.8), 236.8, 17.1), (0.0, 270.4, 2.6), (-np.arccos(0.8), 308.8, -10.3)]


@pytest.mark.parametrize(("phi", "printed_v", "printed_percent"), CASES)
def test_terminal_voltage_at_constant_field(phi, printed_v, printed_percent):
    v = float(terminal_voltage_at_field(1.0, 1.0, phi, MACHINE)) * PHASE_V
    assert v == pytest.approx(printed_v, abs=0.05)  # half of the last digit


@pytest.mark.parametrize(("phi", "printed_v", "printed_percent"), CASES)
def test_regulation_from_the_loaded_voltage(phi, printed_v, printed_percent):
    v = terminal_voltage_at_field(1.0, 1.0, phi, MACHINE)
    field = field_required(v, 1.0, phi, MACHINE)
    rise = (float(open_circuit_voltage(field, MACHINE.saturation)) - float(v)) / float(v)
    # The book takes 480 V over line voltages rounded to whole volts: up to 0.14 %; and the last digit.
    assert 100.0 * rise == pytest.approx(printed_percent, abs=0.19)
