"""Which pair goes into which well.

Nucleophiles go down, electrophiles across, so that one row of a multichannel
pipette delivers one reagent; the set is turned when only that fits one plate.
A set larger than the plate is cut into tiles, one plate each. A reagent none of
whose pairs is to be made gets no row or column. One pair, one well.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from libtool.plate.formats import PlateFormat
from libtool.records import Verdict

if TYPE_CHECKING:
    import pandas

    from libtool.triage import Pair

__all__ = ["PlateMap", "Well", "lay_out"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Well:
    """One well; `row` and `column` are zero-based, `plate` counts from 1."""

    plate: int
    name: str
    row: int
    column: int
    nucleophile: str
    electrophile: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PlateMap:
    """Wells of one or more plates of one format.

    `turned` is True when electrophiles go down and nucleophiles across.
    """

    format: PlateFormat
    plates: int
    turned: bool
    wells: tuple[Well, ...]

    def frame(self) -> pandas.DataFrame:
        """Wells as a table.

        Returns
        -------
        pandas.DataFrame
            plate (from 1), well, row and column (from 1), nucleophile,
            electrophile.
        """
        import pandas

        return pandas.DataFrame(
            [(w.plate, w.name, w.row + 1, w.column + 1, w.nucleophile, w.electrophile) for w in self.wells],
            columns=["plate", "well", "row", "column", "nucleophile", "electrophile"],
        )


def lay_out(pairs: Sequence[Pair], plate: PlateFormat) -> PlateMap:
    """Wells for pairs, rows x columns, over as many plates as needed.

    Parameters
    ----------
    pairs : sequence of Pair
        In the order in which reagents are to appear. Refused pairs get no
        well.
    plate : PlateFormat

    Returns
    -------
    PlateMap
        Wells in plate, row, column order; empty for no pairs.
    """
    kept = [p for p in pairs if p.verdict is not Verdict.REFUSED]
    down = list(dict.fromkeys(p.nucleophile.id for p in kept))
    across = list(dict.fromkeys(p.electrophile.id for p in kept))
    turned = _plates(len(across), len(down), plate) < _plates(len(down), len(across), plate)
    if turned:
        down, across = across, down
    row_of = {name: i for i, name in enumerate(down)}
    column_of = {name: i for i, name in enumerate(across)}
    tiles_across = max(1, -(-len(across) // plate.columns))
    wells: list[Well] = []
    for pair in kept:
        names = (pair.nucleophile.id, pair.electrophile.id)
        i, j = row_of[names[turned]], column_of[names[not turned]]
        tile = (i // plate.rows) * tiles_across + j // plate.columns
        row, column = i % plate.rows, j % plate.columns
        wells.append(
            Well(
                plate=tile + 1,
                name=plate.well_name(row, column),
                row=row,
                column=column,
                nucleophile=names[0],
                electrophile=names[1],
            )
        )
    # Tiles in which nothing is made get no plate.
    used = sorted({w.plate for w in wells})
    numbered = [replace(w, plate=used.index(w.plate) + 1) for w in wells]
    numbered.sort(key=lambda w: (w.plate, w.row, w.column))
    return PlateMap(format=plate, plates=len(used), turned=turned, wells=tuple(numbered))


def _plates(down: int, across: int, plate: PlateFormat) -> int:
    return -(-down // plate.rows) * -(-across // plate.columns)
