"""A worksheet that writes its rows in fewer steps than the library: result sheets have some 100 000 cells."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from xlsxwriter.utility import xl_col_to_name
from xlsxwriter.worksheet import CellBlankTuple, CellNumberTuple, CellStringTuple, Worksheet


class ResultSheet(Worksheet):  # type: ignore[misc]
    """A worksheet whose numbers, shared strings and blanks with a format are written row by row.

    What the file says is what the library would say, but for the attribute ``spans`` of rows, which is
    optional (ECMA-376-1, 18.3.1.73, from memory). Cells of other kinds go the library's own way.
    """

    def fill_column(
        self, first_row: int, column: int, cells: Sequence[tuple[float | str | None, Any]]
    ) -> None:
        """Write the cells of a column, finite numbers, words and blanks, each with its format.

        Parameters
        ----------
        first_row, column : int
            Where the first cell stands, from 0.
        cells : sequence of tuple
            Content and format of each cell; words are not longer than a cell can hold.
        """
        if not cells:
            return
        last_row = first_row + len(cells) - 1
        if self._check_dimensions(first_row, column) or self._check_dimensions(last_row, column):
            raise ValueError(f"a sheet has no cell in row {last_row + 1} and column {column + 1}")
        shared = self.str_table._get_shared_string_index
        for row, (value, look) in enumerate(cells, start=first_row):
            if value is None:
                self.table[row][column] = CellBlankTuple(look)
            elif isinstance(value, str):
                self.table[row][column] = CellStringTuple(shared(value), look)
            else:
                self.table[row][column] = CellNumberTuple(value, look)

    def _write_rows(self) -> None:
        letters = [xl_col_to_name(c) for c in range(self.dim_colmax + 1)]
        for row in range(self.dim_rowmin, self.dim_rowmax + 1):
            cells, info = self.table.get(row), self.row_info.get(row)
            if cells:
                self._write_row(row, None, info)
                self._write_cells(row, cells, letters)
                self._xml_end_tag("row")
            elif info is not None:
                self._write_empty_row(row, None, info)

    def _write_cells(self, row: int, cells: dict[int, Any], letters: list[str]) -> None:
        number, parts = row + 1, []
        for c in sorted(cells):
            cell = cells[c]
            kind, look = type(cell), cell.format
            style = "" if look is None else look._get_xf_index()
            head = f'<c r="{letters[c]}{number}" s="{style}"'
            if kind is CellNumberTuple and look:
                parts.append(f"{head}><v>{cell.number:.16G}</v></c>")
            elif kind is CellStringTuple and look:
                parts.append(f'{head} t="s"><v>{cell.string}</v></c>')
            elif kind is CellBlankTuple and look:
                parts.append(f"{head}/>")
            else:
                self.fh.write("".join(parts))
                parts = []
                self._write_cell(row, c, cell)
        self.fh.write("".join(parts))
