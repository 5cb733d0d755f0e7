"""Room 1: cells in, plant out; and sheets grafted back."""

from study.workbook.blank import write_workbook
from study.workbook.build import check_workbook, read_plant
from study.workbook.reader import own_work_on_results, sheets_that_show_results
from study.workbook.sheets import column_documentation

__all__ = [
    "check_workbook",
    "column_documentation",
    "own_work_on_results",
    "read_plant",
    "sheets_that_show_results",
    "write_workbook",
]
