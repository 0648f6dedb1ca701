"""A set of building blocks, with the fate of every input row.

The books balance: rows in = blocks + duplicates + rejected.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from html import escape
from typing import TYPE_CHECKING

from libtool.assets.drawing import structure_svg
from libtool.blocks.clean import counterion_name
from libtool.blocks.columns import Columns
from libtool.blocks.inventory import Container
from libtool.errors import InputError
from libtool.records import BuildingBlock, RowIssue

if TYPE_CHECKING:
    import pandas

__all__ = ["BlockSet"]

_SHOWN_BLOCKS = 20


@dataclass(frozen=True, slots=True, kw_only=True)
class BlockSet:
    """The blocks of one list and the rows that did not become one.

    Parameters
    ----------
    name : str
        Name of the file.
    sha256 : str
        Hash of the input.
    columns : Columns
        Which columns were taken as structure, id and name.
    column_names : tuple of str
        All columns of the input, in order.
    blocks : tuple of BuildingBlock
    duplicates : tuple of RowIssue
        Rows whose parent is already there under another row.
    rejected : tuple of RowIssue
        Rows without a usable structure.
    containers : tuple of Container
        One per block and per duplicate, in file order: what the store holds.
    remarks : tuple of RowIssue
        Cells of usable rows that could not be read, such as an amount without
        a unit.
    """

    name: str
    sha256: str
    columns: Columns
    column_names: tuple[str, ...]
    blocks: tuple[BuildingBlock, ...]
    duplicates: tuple[RowIssue, ...]
    rejected: tuple[RowIssue, ...]
    containers: tuple[Container, ...] = ()
    remarks: tuple[RowIssue, ...] = ()

    def __len__(self) -> int:
        """Count the usable blocks."""
        return len(self.blocks)

    def __iter__(self) -> Iterator[BuildingBlock]:
        """Iterate over the usable blocks in file order."""
        return iter(self.blocks)

    def __getitem__(self, block_id: str) -> BuildingBlock:
        """Block with this id.

        Raises
        ------
        InputError
            There is none.
        """
        for block in self.blocks:
            if block.id == block_id:
                return block
        raise InputError(f"{self.name}: there is no block with id {block_id!r} among {len(self)} usable ones.")

    @property
    def rows_in(self) -> int:
        """How many rows the input had."""
        return len(self.blocks) + len(self.duplicates) + len(self.rejected)

    def summary(self) -> str:
        """One sentence that balances the books."""
        return (
            f"{self.name}: {self.rows_in} rows = {len(self.blocks)} blocks "
            f"+ {len(self.duplicates)} duplicates + {len(self.rejected)} rejected"
        )

    def frame(self) -> pandas.DataFrame:
        """Blocks as a table.

        Returns
        -------
        pandas.DataFrame
            Columns id, name, smiles (parent), counterions (dot-separated
            SMILES), row, received; one row a block.
        """
        import pandas

        return pandas.DataFrame(
            [(b.id, b.name, b.smiles, ".".join(b.counterions), b.row, b.received) for b in self.blocks],
            columns=["id", "name", "smiles", "counterions", "row", "received"],
        )

    def _repr_html_(self) -> str:
        """What became of every row, and the first blocks with their structures."""
        found = [("structure", self.columns.structure), ("id", self.columns.id), ("name", self.columns.name)]
        found += list(self.columns.others.items())
        columns = ", ".join(f"{escape(role)}: <code>{escape(name)}</code>" for role, name in found if name)
        places = {c.block_id: c for c in reversed(self.containers)}
        lines = "".join(_html_line(block, places[block.id]) for block in self.blocks[:_SHOWN_BLOCKS])
        more = f"<p>... and {len(self) - _SHOWN_BLOCKS} more.</p>" if len(self) > _SHOWN_BLOCKS else ""
        issues = "".join(
            f"<li>{outcome}: {escape(str(issue))}</li>"
            for outcome, group in (
                ("rejected", self.rejected),
                ("duplicate", self.duplicates),
                ("remark", self.remarks),
            )
            for issue in group
        )
        head = "<tr><th>id</th><th>name</th><th>structure</th><th>salt</th><th>amount</th><th>place</th></tr>"
        return (
            f"<p><b>{escape(self.summary())}</b></p><p>Columns taken as {columns}.</p>"
            f"<details><summary>{len(self.rejected)} rejected, {len(self.duplicates)} duplicates, "
            f"{len(self.remarks)} remarks</summary><ul>{issues}</ul></details><table>{head}{lines}</table>{more}"
        )

    @property
    def issues(self) -> pandas.DataFrame:
        """Duplicates, rejected rows and remarks as a table.

        Returns
        -------
        pandas.DataFrame
            Columns row, outcome ("duplicate", "rejected", or "remark" on a
            row that is used), column, received, reason, remedy; in the order
            of the input.
        """
        import pandas

        outcomes = (("duplicate", self.duplicates), ("rejected", self.rejected), ("remark", self.remarks))
        found = [(outcome, issue) for outcome, issues in outcomes for issue in issues]
        found.sort(key=lambda pair: pair[1].row)
        return pandas.DataFrame(
            [(i.row, outcome, i.column, i.received, i.reason, i.remedy) for outcome, i in found],
            columns=["row", "outcome", "column", "received", "reason", "remedy"],
        )


def _html_line(block: BuildingBlock, container: Container) -> str:
    amount = f"{container.amount.value:g} {container.amount.unit}" if container.amount else ""
    drawing = structure_svg(block.mol, {}, f"Structure of {block.id}", 150, 90)
    cells = (escape(block.id), escape(block.name), f'<div style="background:#fff">{drawing}</div>')
    texts = (", ".join(map(counterion_name, block.counterions)), amount, dict(container.texts).get("place", ""))
    return "<tr>" + "".join(f"<td>{cell}</td>" for cell in (*cells, *map(escape, texts))) + "</tr>"
