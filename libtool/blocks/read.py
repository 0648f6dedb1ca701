"""Reading a list of building blocks."""

from __future__ import annotations

from collections.abc import Mapping

from libtool.blocks.blockset import BlockSet
from libtool.blocks.clean import Refusal, identity, parent_structure
from libtool.blocks.columns import find_columns
from libtool.blocks.inventory import Container, Shelf
from libtool.blocks.rows import Source, read_rows
from libtool.errors import InputError
from libtool.records import BuildingBlock, RowIssue

__all__ = ["read_blocks"]


def read_blocks(source: Source, *, mapping: Mapping[str, str] | None = None, sheet: str | None = None) -> BlockSet:
    """Building blocks of a list, and an account of every row that is not one.

    Parameters
    ----------
    source : path, pandas.DataFrame or sequence of str
        CSV, TSV, XLSX, Parquet, SMI, SDF (text formats also gzipped), a
        DataFrame, or a list of SMILES.
    mapping : mapping, optional
        Columns to use instead of the ones that would be found, for instance
        ``{"structure": "Smiles parent", "id": "Cat. No."}``.

    sheet : str, optional
        Sheet of a workbook that has several.

    Returns
    -------
    BlockSet

    Raises
    ------
    InputError
        The file cannot be read, has no structure column, or no usable row;
        `issues` then says why for each row.

    Examples
    --------
    >>> import pandas
    >>> blocks = read_blocks(pandas.DataFrame({"id": ["A1", "A2"], "smiles": ["C1CCNCC1.Cl", "C1CC"]}))
    >>> blocks["A1"].smiles, blocks["A1"].counterions
    ('C1CCNCC1', ('Cl',))
    >>> blocks.summary()
    'DataFrame: 2 rows = 1 blocks + 0 duplicates + 1 rejected'
    """
    rows = read_rows(source, sheet=sheet)
    columns = find_columns(rows, mapping)
    shelf = Shelf(rows, columns)
    containers: list[Container] = []
    remarks: list[RowIssue] = []
    blocks: list[BuildingBlock] = []
    duplicates: list[RowIssue] = []
    rejected: list[RowIssue] = []
    row_of_key: dict[str, BuildingBlock] = {}
    row_of_id: dict[str, int] = {}
    for number, cells in rows.rows:
        received = cells[columns.structure]
        parent = parent_structure(received)
        if isinstance(parent, Refusal):
            rejected.append(_issue(number, columns.structure, received, parent.reason, parent.remedy))
            continue
        # An id goes through as it stands; only a blank one is replaced.
        given = cells[columns.id] if columns.id else ""
        block_id = given if given.strip() else f"row {number}"
        key = identity(parent)
        twin = row_of_key.get(key)
        if twin:
            drawn = "" if twin.smiles == parent.smiles else ", drawn as another tautomer"
            duplicates.append(
                _issue(
                    number,
                    columns.structure,
                    received,
                    f"the parent structure is the one of {twin.id} (row {twin.row}){drawn}",
                    f"{block_id} counts as another container of {twin.id}; nothing to do",
                )
            )
            container, unread = shelf.container(number, cells, twin.id, block_id, parent.mol, parent.counterions)
            containers.append(container)
            remarks.extend(unread)
            continue
        if block_id in row_of_id:
            rejected.append(
                _issue(
                    number,
                    columns.id or "id",
                    block_id,
                    f"row {row_of_id[block_id]} has the same id with another structure",
                    "Give this row an id of its own",
                )
            )
            continue
        block = BuildingBlock(
            id=block_id,
            smiles=parent.smiles,
            row=number,
            received=received,
            name=cells[columns.name].strip() if columns.name else "",
            counterions=parent.counterions,
            columns=tuple(cells.items()),
            mol=parent.mol,
        )
        row_of_key[key] = block
        row_of_id[block_id] = number
        blocks.append(block)
        container, unread = shelf.container(number, cells, block_id, block_id, parent.mol, parent.counterions)
        containers.append(container)
        remarks.extend(unread)
    if not blocks:
        first = f" First: {rejected[0]}" if rejected else ""
        raise InputError(f"{rows.name}: none of its {len(rows.rows)} rows can be used.{first}", rejected)
    return BlockSet(
        name=rows.name,
        sha256=rows.sha256,
        columns=columns,
        column_names=rows.columns,
        blocks=tuple(blocks),
        duplicates=tuple(duplicates),
        rejected=tuple(rejected),
        containers=tuple(containers),
        remarks=tuple(remarks),
    )


def _issue(row: int, column: str, received: str, reason: str, remedy: str) -> RowIssue:
    return RowIssue(row=row, column=column, received=received, reason=reason, remedy=remedy)
