"""The equations of the time simulation once more, the plain way: numpy, complex numbers, `scipy.solve_ivp`.

Written from the books and not from the compiled code: machines and regulators as arrays over the sets, the
network solved by substitution at every call. It knows sets with droop or isochronous governors, regulators on
the phasor, direct, star and soft-started motors, and constant-power consumers. Events split the integration.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from scipy.integrate import solve_ivp

from study.network import dynamics_data as d
from study.network.dynamics_build import Model

STATES = d.STATES
NAMES = (
    *("RATING", "OWN_V", "XD", "XD1", "XD2", "XQ", "XQ2", "XL", "RA", "TD01", "TD02", "TQ02"),
    *("SAT_KIND", "SAT_A", "SAT_B", "TWO_H", "V_REF", "XC", "AVR_P", "AVR_I", "AVR_D", "RATED_FIELD"),
    *("EXCITER_S", "KNEE", "SUPPLY_C", "SUPPLY_V", "SUPPLY_I", "F_REF", "DROOP", "GOV_P", "GOV_I", "GOV_D"),
    *("GOV_FILTER_S", "RACK_S", "DEAD_S", "ENGINE", "STEP", "P_RATED", "GOVERNOR"),
)
MOTOR_NAMES = (
    *("G_SHUNT", "B_SHUNT", "R_STATOR", "R_RUN", "R_START", "X_RUN", "X_START", "SLIP_RATED", "AIR_GAP"),
    *("TORQUE_FACTOR", "MOTOR_2H", "LOAD", "Y_SCALE", "OWN_MOTOR_V", "I_LIMIT", "RAMP_S", "METHOD", "LAW"),
)


@dataclass
class Peer:
    """A model followed by `solve_ivp`; ``started`` [motor] are the times of the starts."""

    model: Model
    started: np.ndarray

    def __post_init__(self) -> None:
        start = self.model.start
        p = start.source
        self.p = {name: p[:, getattr(d, name)].copy() for name in NAMES}
        self.node = p[:, d.NODE].astype(int)
        self.m = {name: start.motor[:, getattr(d, name)].copy() for name in MOTOR_NAMES}
        self.at = start.motor[:, d.MOTOR_NODE].astype(int)
        self.a = start.node[:, d.A_RE] + 1j * start.node[:, d.A_IM]
        self.b = start.node[:, d.B_RE] + 1j * start.node[:, d.B_IM]
        self.floor = start.node[:, d.FLOOR]
        self.v = start.node[:, d.V_RE] + 1j * start.node[:, d.V_IM]
        self.omega = float(start.single[d.OMEGA])
        count = len(p)
        first = p[:, d.FIRST_STATE : d.FIRST_STATE + STATES]
        self.y0 = np.concatenate([first.ravel(), start.motor[:, d.TURNING]])
        self.count = count

    def follow(self, until_s: float, breaks: list[float], at_s: np.ndarray, rtol: float = 1e-5):
        """Return states at the times asked for, [time, state]."""
        out, y = [], self.y0
        edges = [0.0, *sorted(breaks), until_s]
        for begin, end in pairwise(edges):
            inside = at_s[(at_s >= begin) & (at_s < end)] if end < until_s else at_s[at_s >= begin]
            run = solve_ivp(
                self.rates,
                (begin, end),
                y,
                t_eval=np.concatenate([inside, [end]]),
                rtol=rtol,
                atol=1e-8,
                args=(begin,),
            )
            assert run.success, run.message
            out.append(run.y[:, : len(inside)].T)
            y = run.y[:, -1]
        return np.concatenate(out)

    def rates(self, t: float, y: np.ndarray, begin: float) -> np.ndarray:
        """Return the rates of all states."""
        x = y[: self.count * STATES].reshape(self.count, STATES).T
        n = y[self.count * STATES :]
        p, rate = self.p, np.zeros_like(x)
        _, w, e1, psi, e2, field, seen, integral, filtered, _, gi, gf, rack, delay, turbo, power, _ = x
        f = np.sum(p["TWO_H"] * p["RATING"] * w) / np.sum(p["TWO_H"] * p["RATING"])
        i_d, i_q, vd, vq = self.network(t, begin, x, (n, f))
        active = vd * i_d + vq * i_q
        lead = p["XD1"] - p["XL"]
        inner = i_d - (p["XD1"] - p["XD2"]) / lead**2 * (psi + lead * i_d - e1)
        saturated = np.where(p["SAT_KIND"] == 1.0, p["SAT_B"] * np.maximum(e1 - p["SAT_A"], 0.0) ** 2, 0.0)
        rate[0] = self.omega * (w - f)
        rate[2] = (field - e1 - (p["XD"] - p["XD1"]) * inner - saturated) / p["TD01"]
        rate[3] = (e1 - lead * i_d - psi) / p["TD02"]
        rate[4] = ((p["XQ"] - p["XQ2"]) * i_q - e2) / p["TQ02"]
        torque = (active + p["RA"] * (i_d**2 + i_q**2)) / w
        rate[1] = (rack * p["P_RATED"] - torque) / p["TWO_H"]
        current, voltage = i_d + 1j * i_q, vd + 1j * vq
        ceiling = p["SUPPLY_C"] + np.abs(p["SUPPLY_V"] * voltage + 1j * p["SUPPLY_I"] * current)
        error = p["V_REF"] * np.minimum(1.0, w / np.maximum(p["KNEE"], 1e-9)) - seen
        error = np.where(p["KNEE"] > 0.0, error, p["V_REF"] - seen)
        rate[6] = (np.abs(voltage + 1j * p["XC"] * current) - seen) / 0.005
        rate[8] = (error - filtered) / 0.01
        asked = p["RATED_FIELD"] * (p["AVR_P"] * error + integral + p["AVR_D"] * rate[8])
        stuck = ((asked > ceiling) & (error > 0.0)) | ((asked < 0.0) & (error < 0.0))
        rate[7] = np.where(stuck, 0.0, p["AVR_I"] * error)
        rate[5] = (np.clip(asked, 0.0, ceiling) - field) / p["EXCITER_S"]
        rate[15] = (active / p["P_RATED"] - power) / 0.2
        error = p["F_REF"] - np.where(p["GOVERNOR"] == d.BY_DROOP, p["DROOP"] * power, 0.0) - w
        rate[11] = (error - gf) / p["GOV_FILTER_S"]
        asked = p["GOV_P"] * error + gi + p["GOV_D"] * rate[11]
        most = np.minimum(1.1 * p["ENGINE"], turbo + p["STEP"] * p["ENGINE"])
        least = -0.1 * p["ENGINE"]
        stuck = ((asked > most) & (error > 0.0)) | ((asked < least) & (error < 0.0))
        rate[10] = np.where(stuck, 0.0, p["GOV_I"] * error)
        fuel = np.clip(asked, least, most)
        rate[13] = (fuel - delay) / (0.5 * p["DEAD_S"])
        rate[12] = (2.0 * delay - fuel - rack) / p["RACK_S"]
        rate[14] = (rack - turbo) / 2.0
        return np.concatenate([rate.T.ravel(), self.motor_rates(t, begin, n, f)])

    def network(self, t, begin, x, running):
        """Return axis currents and voltages of the sets; the voltages of the nodes stay in ``v``."""
        p, w, angle = self.p, x[1], x[0]
        self.w = w
        share = (p["XD2"] - p["XL"]) / (p["XD1"] - p["XL"])
        eq, ed = w * (share * x[2] + (1.0 - share) * x[3]), w * x[4]
        turn = np.exp(1j * (angle - 0.5 * np.pi))
        scale = p["RATING"] * p["OWN_V"]
        mean = 1.0 / (p["RA"] + 0.5j * w * (p["XD2"] + p["XQ2"]))
        y = self.model.start.y.copy()
        np.add.at(y, (self.node, self.node), mean * scale * p["OWN_V"])
        y[np.diag_indices(len(y))] += np.conj(self.b)
        v = self.v
        for _ in range(60):
            y_now = y.copy()
            np.add.at(y_now, (self.at, self.at), self.motor_admittance(t, begin, running, np.abs(v[self.at])))
            own = v[self.node] * p["OWN_V"] / turn
            i_d, i_q = self.axes(own.real, own.imag, ed, eq)
            drive = np.zeros(len(v), complex)
            np.add.at(drive, self.node, (i_d + 1j * i_q + mean * own) * turn * scale)
            drive -= np.conj(self.a) * v / np.maximum(np.abs(v) ** 2, self.floor)
            after = np.linalg.solve(y_now, drive)
            done = np.abs(after - v).max() < 1e-10
            v = after
            if done:
                break
        self.v = v
        own = v[self.node] * p["OWN_V"] / turn
        return (*self.axes(own.real, own.imag, ed, eq), own.real, own.imag)

    def axes(self, vd, vq, ed, eq):
        """Return Id and Iq from ``Vd = -Ra Id + wX''q Iq + Ed``, ``Vq = -Ra Iq - wX''d Id + Eq``."""
        p, w = self.p, self.w
        xd, xq = w * p["XD2"], w * p["XQ2"]
        determinant = p["RA"] ** 2 + xd * xq
        i_d = (p["RA"] * (ed - vd) + xq * (eq - vq)) / determinant
        return i_d, (p["RA"] * (eq - vq) - xd * (ed - vd)) / determinant

    def motor_circuit(self, running):
        """Return slip, rotor resistance over slip, leakage reactance and the weight of standstill."""
        n, f = running
        m, slip = self.m, (f - n) / f
        w = np.clip((slip - m["SLIP_RATED"]) / (1.0 - m["SLIP_RATED"]), 0.0, 1.0)
        r = (m["R_RUN"] + w * (m["R_START"] - m["R_RUN"])) / slip
        return slip, r, m["X_RUN"] + w * (m["X_START"] - m["X_RUN"]), w

    def voltage_share(self, t, begin, y, u):
        """Return what the starters leave of the voltage, and which motors are on."""
        m = self.m
        on = self.started <= begin + 1e-12
        ramp = np.clip((t - self.started) / np.maximum(m["RAMP_S"], 1e-9), 0.0, 1.0)
        soft = np.minimum(0.4 + 0.6 * ramp, m["I_LIMIT"] / (y * u * m["OWN_MOTOR_V"]))
        return np.where(m["METHOD"] == d.SOFT_STARTER, soft, 1.0), on

    def motor_admittance(self, t, begin, running, u):
        """Return the admittances that the network sees."""
        m = self.m
        _, r, x, _ = self.motor_circuit(running)
        y = m["G_SHUNT"] - 1j * m["B_SHUNT"] + 1.0 / (m["R_STATOR"] + r + 1j * x)
        k, on = self.voltage_share(t, begin, np.abs(y), u)
        g = k * k * y.real
        seen = g - 1j * np.sqrt(k * k * np.abs(y) ** 2 - g * g)
        return np.where(on, seen * m["Y_SCALE"], 0.0)

    def motor_rates(self, t, begin, n, f):
        """Return how the motors gain speed."""
        m, u = self.m, np.abs(self.v[self.at])
        _, r, x, w = self.motor_circuit((n, f))
        y = m["G_SHUNT"] - 1j * m["B_SHUNT"] + 1.0 / (m["R_STATOR"] + r + 1j * x)
        k, on = self.voltage_share(t, begin, np.abs(y), u)
        v = u * m["OWN_MOTOR_V"] * k
        torque = r / ((m["R_STATOR"] + r) ** 2 + x * x) * v * v * m["AIR_GAP"] / f
        torque *= 1.0 + w * (m["TORQUE_FACTOR"] - 1.0)
        fan = 0.1 + 0.9 * n * n
        against = m["LOAD"] * np.where(m["LAW"] == d.FAN, fan, 1.0)
        rate = (torque - against) / m["MOTOR_2H"]
        return np.where(on, np.where(n > 0.0, rate, np.maximum(rate, 0.0)), 0.0)
