"""The workbook file as a zip package: result sheets go in, every part that is not ours keeps its bytes.

Read a workbook with `open_package`, join the result sheets to it with `graft_result_sheets`, put it back with
`write_atomically`; `validate_package` lists what is wrong with a package.
"""

from __future__ import annotations

from study.workbook.package.checks import validate_package
from study.workbook.package.graft import graft_result_sheets
from study.workbook.package.opc import Package, open_package
from study.workbook.package.write import write_atomically

__all__ = ["Package", "graft_result_sheets", "open_package", "validate_package", "write_atomically"]
