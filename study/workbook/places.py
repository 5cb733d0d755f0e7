"""Where every value stands in the workbook: equipment and heading to the address of the cell."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from study.workbook.faults import place
from study.workbook.links import RowsBySheet
from study.workbook.sheets import EQUIPMENT_SHEETS
from study.workbook.tables import Row

_KEYED = (*EQUIPMENT_SHEETS, "Modes", "Running", "Demand")


class CellPlaces(Mapping[tuple[str, str], str]):
    """Addresses by equipment and heading without unit; each is made when it is asked for.

    Parameters
    ----------
    rows : mapping
        Rows of each sheet.
    others : mapping
        Addresses that do not belong to a row of equipment.
    """

    def __init__(self, rows: RowsBySheet, others: Mapping[tuple[str, str], str]) -> None:
        self._others = dict(others)
        self._rows: dict[str, list[Row]] = {}
        for sheet in _KEYED:
            for row in rows.get(sheet, ()):
                self._rows.setdefault(row.name, []).append(row)
        for row in rows.get("Set-points", ()):
            for heading, column in row.table.heading_columns.items():
                key = f"{row.values.get('equipment')} in {row.values.get('mode')}", heading
                self._others[key] = place(row.sheet, column, row.number)

    def __getitem__(self, key: tuple[str, str]) -> str:
        """Return the address of a cell, blank or not."""
        if key in self._others:
            return self._others[key]
        name, heading = key
        for row in self._rows.get(name, ()):
            column = row.table.heading_columns.get(heading)
            if column is not None:
                return place(row.sheet, column, row.number)
        raise KeyError(key)

    def __iter__(self) -> Iterator[tuple[str, str]]:
        """Yield every pair of equipment and heading once."""
        yield from self._others
        for name, rows in self._rows.items():
            headings = dict.fromkeys(h for row in rows for h in row.table.heading_columns)
            yield from ((name, heading) for heading in headings if (name, heading) not in self._others)

    def __len__(self) -> int:
        """Return the number of pairs."""
        return sum(1 for _ in self)
