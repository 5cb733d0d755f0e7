"""Checked rows of loads and spectra as the model's dataclasses."""

from __future__ import annotations

from study.model.loads import ConverterData, Load, MotorData
from study.model.protection import SpectrumLine
from study.workbook.build_parts import make, model_values
from study.workbook.tables import Row


def load(row: Row) -> Load:
    """Return a consumer; the duty point is the rated output where no absorbed power is given."""
    values = model_values(row)
    absorbed_kw = values["p_absorbed_kw"]
    stage = values["trip_stage"]
    return make(
        Load,
        values,
        p_absorbed_kw=values["p_rated_kw"] if absorbed_kw is None else absorbed_kw,
        absorbed_is_given=absorbed_kw is not None,
        phases=int(values["phases"]),
        trip_stage=0 if stage == "none" else int(stage),
        motor=make(MotorData, values) if values["kind"] == "motor" else None,
        converter=(
            make(ConverterData, values, kind=values["converter_kind"])
            if values["fed_by_converter"] == "yes"
            else None
        ),
    )


def spectrum_line(row: Row) -> SpectrumLine:
    """Return one harmonic of a converter type."""
    return make(SpectrumLine, model_values(row))
