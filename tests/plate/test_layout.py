"""From pairs to wells: one pair one well, whatever the set and the plate."""

from __future__ import annotations

import re
from dataclasses import replace

import pandas
import pytest
from hypothesis import given
from hypothesis import strategies as st

from libtool.blocks import read_blocks
from libtool.errors import LayoutError
from libtool.plate import PlateMap, lay_out, plate_format, plate_formats
from libtool.records import Choice, Verdict
from libtool.triage import Pair, build_library

# Straight-chain amines and bromides: real pairs, made once; the layout asks only for ids and the verdict.
TEMPLATE = next(
    iter(
        build_library(
            read_blocks(pandas.DataFrame({"id": ["N"], "smiles": ["C1CCNCC1"]})),
            read_blocks(pandas.DataFrame({"id": ["E"], "smiles": ["CCCBr"]})),
        )
    )
)


def pair(i: int, j: int, verdict: Verdict = Verdict.GO) -> Pair:
    return replace(
        TEMPLATE,
        nucleophile=replace(TEMPLATE.nucleophile, id=f"N{i}"),
        electrophile=replace(TEMPLATE.electrophile, id=f"E{j}"),
        verdict=verdict,
    )


def rectangle(rows: int, columns: int) -> list[Pair]:
    return [pair(i, j) for i in range(rows) for j in range(columns)]


def keys(found: PlateMap) -> list[tuple[str, str]]:
    return [(w.nucleophile, w.electrophile) for w in found.wells]


# Rows and columns, corners: ANSI/SLAS 4-2004 for 96, 384, 1536; the usual trays for 24 and 48.
FORMATS = [
    (24, 4, 6, "A01", "D06"),
    (48, 6, 8, "A01", "F08"),
    (96, 8, 12, "A01", "H12"),
    (384, 16, 24, "A01", "P24"),
    (1536, 32, 48, "A01", "AF48"),
]


@pytest.mark.parametrize(("wells", "rows", "columns", "first", "last"), FORMATS)
def test_corners_of_the_formats(wells: int, rows: int, columns: int, first: str, last: str) -> None:
    plate = plate_format(wells)
    assert (plate.rows, plate.columns) == (rows, columns)
    assert plate.rows * plate.columns == wells
    assert plate.well_name(0, 0) == first
    assert plate.well_name(rows - 1, columns - 1) == last


def test_every_known_format_is_tested_above() -> None:
    assert sorted(plate_formats()) == [f[0] for f in FORMATS]


def test_rows_beyond_z_continue_with_two_letters() -> None:
    plate = plate_format(1536)
    assert [plate.well_name(r, 0) for r in (24, 25, 26, 27, 31)] == ["Y01", "Z01", "AA01", "AB01", "AF01"]


@pytest.mark.parametrize("wells", [f[0] for f in FORMATS])
def test_names_of_a_format_are_unique_and_well_formed(wells: int) -> None:
    plate = plate_format(wells)
    names = [plate.well_name(r, c) for r in range(plate.rows) for c in range(plate.columns)]
    assert len(set(names)) == wells
    assert all(re.fullmatch(r"[A-Z]{1,2}[0-9]{2}", n) for n in names)


@pytest.mark.parametrize(("row", "column"), [(-1, 0), (0, -1), (8, 0), (0, 12)])
def test_wells_outside_the_plate_are_refused(row: int, column: int) -> None:
    with pytest.raises(LayoutError, match="8 rows and 12 columns"):
        plate_format(96).well_name(row, column)


@pytest.mark.parametrize("wells", [0, 1, 95, 100, -96])
def test_unknown_formats_are_refused_with_the_known_ones(wells: int) -> None:
    with pytest.raises(LayoutError, match="24, 48, 96, 384, 1536"):
        plate_format(wells)


CHOSEN = st.sets(st.tuples(st.integers(0, 30), st.integers(0, 30)), max_size=60)


@given(chosen=CHOSEN, refused=CHOSEN, wells=st.sampled_from([f[0] for f in FORMATS]))
def test_one_pair_one_well(chosen: set[tuple[int, int]], refused: set[tuple[int, int]], wells: int) -> None:
    plate = plate_format(wells)
    pairs = [pair(i, j, Verdict.REFUSED if (i, j) in refused else Verdict.WATCH) for i, j in sorted(chosen)]
    found = lay_out(pairs, plate)
    expected = {p.key for p in pairs if p.verdict is not Verdict.REFUSED}
    assert sorted(keys(found)) == sorted(expected)
    assert len({(w.plate, w.name) for w in found.wells}) == len(found.wells)
    assert all(w.name == plate.well_name(w.row, w.column) for w in found.wells)
    assert {w.plate for w in found.wells} == set(range(1, found.plates + 1))
    assert [(w.plate, w.row, w.column) for w in found.wells] == sorted((w.plate, w.row, w.column) for w in found.wells)


@given(chosen=CHOSEN, wells=st.sampled_from([f[0] for f in FORMATS]))
def test_one_row_of_one_plate_holds_one_reagent(chosen: set[tuple[int, int]], wells: int) -> None:
    """A multichannel pipette can serve it: along a row one reagent, along a column the other."""
    found = lay_out([pair(i, j) for i, j in sorted(chosen)], plate_format(wells))
    down: dict[tuple[int, int], set[str]] = {}
    across: dict[tuple[int, int], set[str]] = {}
    for well in found.wells:
        first, second = (well.nucleophile, well.electrophile)[:: -1 if found.turned else 1]
        down.setdefault((well.plate, well.row), set()).add(first)
        across.setdefault((well.plate, well.column), set()).add(second)
    assert all(len(reagents) == 1 for reagents in (*down.values(), *across.values()))


@given(rows=st.integers(1, 40), columns=st.integers(1, 40), wells=st.sampled_from([24, 96, 384]))
def test_a_full_rectangle_takes_the_fewer_plates_of_the_two_ways(rows: int, columns: int, wells: int) -> None:
    plate = plate_format(wells)

    def tiles(down: int, across: int) -> int:
        return -(-down // plate.rows) * -(-across // plate.columns)

    found = lay_out(rectangle(rows, columns), plate)
    assert found.plates == min(tiles(rows, columns), tiles(columns, rows))
    assert len(found.wells) == rows * columns


def test_a_set_is_turned_only_when_that_saves_plates() -> None:
    assert not lay_out(rectangle(8, 12), plate_format(96)).turned
    assert not lay_out(rectangle(4, 4), plate_format(96)).turned
    turned = lay_out(rectangle(12, 8), plate_format(96))
    assert turned.turned
    assert turned.plates == 1
    assert {w.row for w in turned.wells if w.electrophile == "E3"} == {3}


def test_several_plates() -> None:
    found = lay_out(rectangle(10, 30), plate_format(96))
    # 30 reagents need four plates of 8 rows; the other way round it would be two by three.
    assert (found.plates, found.turned) == (4, True)
    assert len(found.wells) == 300
    assert [sum(w.plate == p for w in found.wells) for p in (1, 2, 3, 4)] == [80, 80, 80, 60]


def test_empty_tiles_get_no_plate_and_unused_reagents_no_row() -> None:
    corners = [pair(0, 0), *(pair(i, i) for i in range(1, 20))]
    found = lay_out(corners, plate_format(96))
    assert {w.plate for w in found.wells} == set(range(1, found.plates + 1))
    gap = lay_out([pair(0, 0), pair(5, 0), pair(9, 0)], plate_format(96))
    assert [w.name for w in gap.wells] == ["A01", "B01", "C01"]


def test_reagents_keep_their_order() -> None:
    found = lay_out([pair(5, 2), pair(5, 0), pair(1, 2)], plate_format(24))
    assert [(w.name, w.nucleophile, w.electrophile) for w in found.wells] == [
        ("A01", "N5", "E2"),
        ("A02", "N5", "E0"),
        ("B01", "N1", "E2"),
    ]


def test_nothing_to_lay_out() -> None:
    for pairs in ([], [pair(0, 0, Verdict.REFUSED)]):
        found = lay_out(pairs, plate_format(96))
        assert (found.plates, found.wells) == (0, ())
        assert list(found.frame().columns) == ["plate", "well", "row", "column", "nucleophile", "electrophile"]


def test_frame_counts_rows_and_columns_from_one() -> None:
    frame = lay_out(rectangle(2, 2), plate_format(96)).frame()
    assert frame["well"].tolist() == ["A01", "A02", "B01", "B02"]
    assert frame[["row", "column"]].to_numpy().tolist() == [[1, 1], [1, 2], [2, 1], [2, 2]]


def test_what_the_library_refuses_never_reaches_a_plate() -> None:
    library = build_library(
        read_blocks(pandas.DataFrame({"id": ["N1", "N2"], "smiles": ["C1CCNCC1", "Nc1ccc(-c2ccccc2)cc1"]})),
        read_blocks(pandas.DataFrame({"id": ["E1", "E2"], "smiles": ["CCCBr", "COCCl"]})),
    )
    refused = {p.key for p in library if p.verdict is Verdict.REFUSED}
    assert refused == {("N1", "E2"), ("N2", "E1"), ("N2", "E2")}
    assert all(p.suggestion is Choice.SKIP for p in library if p.key in refused)
    assert keys(lay_out(tuple(library), plate_format(96))) == [("N1", "E1")]
