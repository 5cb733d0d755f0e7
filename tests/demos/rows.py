"""Builders that expand the compact data of a demo vessel into the rows of the workbook's sheets."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Final

from tests.demos import catalogue, sizing
from tests.demos.catalogue import Row
from tests.demos.headings import DEVICE_COLUMNS

SHEETS: Final = (
    *("Project", "Acceptance", "Boards", "Gensets", "Shore supplies", "Converter supplies"),
    *("Synchronous motors", "Transformers", "Three-winding transformers", "Cables", "Ties", "Reactors"),
    *("Filters", "Loads", "Modes", "Running", "Set-points", "Demand", "Simultaneity", "Interlocks"),
    *("Transfers", "Devices", "Protection functions", "Setting ranges", "Curves", "Let-through"),
    *("Maker discrimination", "Spectra", "Events"),
)
NAMED_SHEETS: Final = (*SHEETS[2:13], "Loads", "Devices")
Tables = dict[str, list[Row]]


def table(headings: str, *lines: Sequence[object]) -> list[Row]:
    """Return one row for each line: values in the order of `headings`, which are separated by bars."""
    names = headings.split("|")
    for line in lines:
        if len(line) > len(names):
            raise ValueError(f"{line[0]}: {len(line)} values for {len(names)} headings")
    return [{n: v for n, v in zip(names, line, strict=False) if v is not None} for line in lines]


def making_ka(breaking_ka: float, volts: float = 0.0) -> float:
    """Return the making capacity that goes with a breaking capacity.

    Ratios from memory of IEC 60947-2, and of IEC 62271-100 at 60 Hz above 1 kV.
    """
    if volts > 1000:
        return round(2.6 * breaking_ka, 1)
    for above, ratio in ((50, 2.2), (20, 2.1), (10, 2.0), (6, 1.7)):
        if breaking_ka > above:
            return round(breaking_ka * ratio, 1)
    return round(breaking_ka * 1.5, 1)


class Book:
    """The sheets of one vessel while they fill; keeps of each board what later rows need to know."""

    def __init__(
        self,
        *,
        hz: float,
        modes: Sequence[str],
        consumer_volts: Mapping[float, float] | None = None,
        letters: str = "",
    ) -> None:
        self.letters = letters
        self.restarts = 0
        self.hz = hz
        self.consumer_volts = dict(consumer_volts or {})
        self.modes = tuple(modes)
        self.sheets: Tables = {sheet: [] for sheet in SHEETS}
        self.volts: dict[str, float] = {}
        self.breaking_ka: dict[str, float] = {}
        self.ambient_degc: dict[str, float] = {}

    def add(self, sheet: str, headings: str, *lines: Sequence[object]) -> None:
        """Add plain rows to a sheet."""
        self.sheets[sheet] += table(headings, *lines)

    def next_restart_s(self) -> float:
        """Return the restart delay of the next essential motor: ten steps, five seconds apart."""
        self.restarts += 1
        return 5.0 * (self.restarts % 10)

    def amend(self, sheet: str, columns: Row, *names: str) -> None:
        """Write further columns into rows that stand already."""
        for name in names:
            row = next(row for row in self.sheets[sheet] if next(iter(row.values())) == name)
            row |= columns

    def boards(self, *lines: Sequence[object]) -> None:
        """Add boards; the last two values are the breaking capacity fitted [kA] and the ambient [°C]."""
        headings = (
            "Board|Nominal voltage [V]|Role|Busbar rated current [A]|Peak withstand [kA]"
            "|Short-time withstand [kA]|Short-time duration [s]|System earthing|Redundancy group"
        )
        for *line, breaking_ka, ambient_degc in lines:
            name = str(line[0])
            self.volts[name] = float(str(line[1]))
            self.breaking_ka[name] = float(str(breaking_ka))
            self.ambient_degc[name] = float(str(ambient_degc))
            self.add("Boards", headings, line)

    def cable(
        self,
        name: str,
        ends: tuple[str, str],
        amps: float,
        length_m: float,
        *,
        board: str,
        cores: str = "3",
        phases: int = 3,
        bunched: int = 6,
        max_drop_percent: float = 3.0,
        least_mm2: float = 1.5,
        drop_amps: float | None = None,
        section_mm2: float | None = None,
        **columns: object,
    ) -> None:
        """Add a cable that carries `amps`, or with the section given; it lies in the room of `board`."""
        ambient = self.ambient_degc[board]
        runs, section = sizing.choose_cable(
            amps,
            self.volts[board],
            length_m,
            cores=cores,
            phases=phases,
            ambient_degc=ambient,
            bunched=bunched,
            max_drop_percent=max_drop_percent,
            least_mm2=least_mm2,
            drop_amps=drop_amps,
        )
        if section_mm2 is not None:
            runs, section = 1, section_mm2
        row: Row = {
            "Cable": name,
            "From": ends[0],
            "To": ends[1],
            "Cores": cores if cores == "3 single" else int(cores),
            "Runs in parallel": runs,
            "Section [mm2]": section,
            "Length [m]": length_m,
            "Conductor": "copper",
            "Conductor class": 2 if section > 10 else 5,
            "Tinned": "no" if section > 10 else "yes",
            "Insulation": "EPR",
            "Conductor temperature [°C]": 90,
            "Short-circuit temperature [°C]": 250,
            "Ambient temperature [°C]": ambient,
            "Cables bunched": bunched,
            "Duty": "continuous",
        }
        if self.volts[board] > 1000:
            row |= {"R0 [ohm/km]": 1.9, "X0 [ohm/km]": 0.35, "Capacitance [uF/km]": 0.42}
        self.sheets["Cables"].append(row | columns)

    def least_mm2(self, board: str) -> float:
        """Return the smallest section of a run that a short-time delayed breaker protects [mm2]."""
        return 70 if self.volts[board] > 1000 else 10 if self.breaking_ka[board] >= 25 else 4

    def device(
        self, name: str, equipment: str, end: str | None, kind: str, amps: float, **columns: object
    ) -> None:
        """Add a protective device with whatever settings are named."""
        row: Row = {
            "Device": name,
            "Equipment": equipment,
            "End": end,
            "Kind": kind,
            "Rated current [A]": amps,
        }
        row |= {DEVICE_COLUMNS[key]: value for key, value in columns.items()}
        self.sheets["Devices"].append({heading: v for heading, v in row.items() if v is not None})

    def breaker(
        self,
        name: str,
        equipment: str,
        board: str,
        amps: float,
        *,
        icw_ka: float | None = None,
        **settings: object,
    ) -> None:
        """Add a circuit breaker of the breaking capacity fitted on a board.

        Above 1 kV the settings stand in a row of their own, that of the relay which trips it.
        """
        volts, breaking_ka = self.volts[board], self.breaking_ka[board]
        big = icw_ka is not None
        ratings: Row = {
            "u": 7200 if volts > 1000 else 690 if volts > 500 else 500,
            "icu": breaking_ka,
            "ics": breaking_ka,
            "icw": icw_ka,
            "icw_s": 1 if big else None,
            "icm": making_ka(breaking_ka, volts),
            "source": "adjustable",
            "open_s": 0.03 if big else 0.005,
            "break_s": 0.04 if big else 0.02,
        }
        release: Row = {"senses": "rms", "i_tol": 10, "t_tol": 5, "category": "B" if big else "A"} | settings
        if volts <= 1000:
            self.device(name, equipment, board, "circuit breaker", amps, **ratings | release)
            return
        self.device(
            name,
            equipment,
            board,
            "circuit breaker",
            max(630, amps),
            **ratings | {"icw": breaking_ka, "icw_s": 1},
        )
        self._relay(f"R{name[1:]}", equipment, board, amps, settings)

    def _relay(self, name: str, equipment: str, board: str, amps: float, settings: Row) -> None:
        """Add the relay of a breaker above 1 kV; its very inverse curve goes through the long-time point."""
        seconds, multiple = float(str(settings["tr"])), float(str(settings["tr_at"]))
        times = {"open_s": 0.04, "break_s": 0.08, "i_tol": 5, "t_tol": 5, "senses": "rms"}
        kept = {key: settings[key] for key in ("ir", "isd", "tsd", "ii") if key in settings}
        inverse = {"relay": "very inverse", "tms": round(seconds * (multiple - 1) / 13.5, 2)}
        transformer = {"ct1": amps, "ct2": 1, "reset": "definite", "source": "adjustable"}
        self.device(name, equipment, board, "overcurrent relay", amps, **kept | inverse | transformer | times)

    def running(self, states: Mapping[str, str]) -> None:
        """Add the Running sheet: for each equipment one word for each mode."""
        for equipment, words in states.items():
            if len(words.split()) != len(self.modes):
                raise ValueError(f"{equipment}: {words}")
            self.sheets["Running"].append(
                {"Equipment": equipment, **dict(zip(self.modes, words.split(), strict=True))}
            )

    def finish(self) -> Tables:
        """Add the makers' sheets that the rows refer to, check the names and return the tables."""
        curves = {str(row["Curve"]) for row in self.sheets["Devices"] if "Curve" in row}
        spectra = {
            str(row["Spectrum"])
            for sheet in ("Loads", "Converter supplies")
            for row in self.sheets[sheet]
            if "Spectrum" in row
        }
        self.sheets["Curves"] = catalogue.curve_rows()
        self.sheets["Let-through"] = catalogue.let_through_rows(curves)
        self.sheets["Spectra"] += catalogue.spectrum_rows(spectra)
        names = [
            str(next(iter(row.values()))).casefold() for sheet in NAMED_SHEETS for row in self.sheets[sheet]
        ]
        twice = sorted({name for name in names if names.count(name) > 1})
        if twice:
            raise ValueError(f"names used twice: {', '.join(twice)}")
        return self.sheets
