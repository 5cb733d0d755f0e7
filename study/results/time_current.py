"""Result for time-current sheets: the band of every device in series from a consumer to a source."""

from __future__ import annotations

from dataclasses import dataclass

from study.results.arrays import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetBand:
    """One device of a sheet: its band at `TimeCurrentSheet.current_a`.

    ``earliest_s`` and ``latest_s`` [point] are inf where the device never opens and NaN where the workbook
    does not say. ``ratio`` is ampere at the sheet's voltage for 1 A where the device stands.
    """

    device: str
    station: int
    ratio: float
    earliest_s: FloatArray
    latest_s: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeCurrentSheet:
    """One distinct chain of stations; all currents are in A at ``u_reference_v``, the consumer's side.

    ``stations`` and ``bands`` go from the consumer to the source; ``largest_a`` and ``least_a`` [station] are
    the currents through each at half a cycle of the largest and the least fault behind the first one.
    """

    mode: str
    zone: str
    source: str
    stations: tuple[int, ...]
    u_reference_v: float
    current_a: FloatArray
    bands: tuple[SheetBand, ...]
    largest_a: FloatArray
    least_a: FloatArray
