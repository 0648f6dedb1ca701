"""What leaves the house: reagent lists, pairs, plate, products, and the report.

`write_all` writes the lot; `files` makes sure that a file arrives whole and
survives a spreadsheet, `standing` says what holds for a reagent, `reagents`,
`lists` and `sdf` make the lists, `report` and `sections` the HTML report.
"""

from libtool.export.everything import FILE_NAMES, write_all
from libtool.export.reagents import write_reagents
from libtool.export.report import write_report

__all__ = ["FILE_NAMES", "write_all", "write_reagents", "write_report"]
