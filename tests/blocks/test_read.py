"""Reading lists: formats, encodings, ids, and the balance of rows."""

from __future__ import annotations

import csv
import io
import subprocess
import sys
from pathlib import Path

import pandas
import pytest
from hypothesis import given
from hypothesis import strategies as st
from rdkit import Chem
from rdkit.Chem import AllChem

from libtool.blocks import BlockSet, read_blocks
from libtool.errors import InputError

ROWS = [
    ("007", "C1CCNCC1.Cl", "pipéridine"),
    ("A-1 ", "NCc1ccccc1", "benzylamine"),
    ("Ω/7", "Oc1ccccc1", "phenol, “pure”"),
    ("1e5", "Cc1cc[nH]n1", "3-methyl;pyrazole"),
    ("0012.0", "N[C@@H](C)C(=O)OC", "L-Ala-OMe"),
]
PARENTS = ["C1CCNCC1", "NCc1ccccc1", "Oc1ccccc1", "Cc1cc[nH]n1", "COC(=O)[C@H](C)N"]


def table_text(delimiter: str, rows: list[tuple[str, str, str]] = ROWS) -> str:
    text = io.StringIO()
    writer = csv.writer(text, delimiter=delimiter, lineterminator="\r\n")
    writer.writerow(["ID", "SMILES", "Name"])
    writer.writerows(rows)
    return text.getvalue()


def check(found: BlockSet) -> None:
    assert [b.smiles for b in found] == PARENTS
    assert [b.id for b in found] == [r[0] for r in ROWS]
    assert [b.row for b in found] == [2, 3, 4, 5, 6]
    assert found["007"].counterions == ("Cl",)
    assert [b.received for b in found] == [r[1] for r in ROWS]


@pytest.mark.parametrize(
    ("name", "delimiter", "encoding"),
    [
        ("a.csv", ",", "utf-8"),
        ("a.csv", ",", "utf-8-sig"),
        ("a.csv", ";", "utf-8"),
        ("a.csv", "|", "utf-8"),
        ("a.csv", "\t", "utf-8"),
        ("a.txt", "\t", "utf-8"),
        ("a.tsv", "\t", "utf-8"),
        ("a.tab", "\t", "utf-16"),
        ("a.csv", ";", "utf-16"),
        ("A.CSV", ",", "utf-8"),
    ],
)
def test_tables_in_the_formats_that_spreadsheets_save(tmp_path: Path, name: str, delimiter: str, encoding: str) -> None:
    path = tmp_path / name
    path.write_bytes(table_text(delimiter).encode(encoding))
    found = read_blocks(path)
    check(found)
    assert [b.name for b in found] == [r[2] for r in ROWS]


@pytest.mark.parametrize(("encoding", "order"), [("utf-16-le", b"\xff\xfe"), ("utf-16-be", b"\xfe\xff")])
def test_both_byte_orders(tmp_path: Path, encoding: str, order: bytes) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(order + table_text(",").encode(encoding))
    check(read_blocks(path))


@pytest.mark.parametrize("encoding", ["latin-1", "cp1252"])
def test_western_encodings_keep_accents_and_ids(tmp_path: Path, encoding: str) -> None:
    rows = [("Ä1", "CCN", "éthylamine"), ("Ñ2", "CCO", "Ethanol µ")]
    path = tmp_path / "a.csv"
    path.write_bytes(table_text(";", rows).encode(encoding))
    found = read_blocks(path)
    assert [(b.id, b.name) for b in found] == [("Ä1", "éthylamine"), ("Ñ2", "Ethanol µ")]


@pytest.mark.parametrize("ending", ["\n", "\r\n", "\r"])
def test_line_ends_of_all_systems(tmp_path: Path, ending: str) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(table_text(",").replace("\r\n", ending).encode())
    check(read_blocks(path))


def test_a_data_frame_is_read_like_its_file() -> None:
    check(read_blocks(pandas.DataFrame(ROWS, columns=["ID", "SMILES", "Name"])))


def test_missing_cells_of_a_data_frame_are_empty() -> None:
    frame = pandas.DataFrame({"id": ["A", None, "C"], "smiles": ["CCN", "CCO", float("nan")], "mg": [1.5, None, 2]})
    found = read_blocks(frame)
    assert [b.id for b in found] == ["A", "row 3"]
    assert dict(found["row 3"].columns)["mg"] == ""
    assert found.rejected[0].row == 4


def test_smi_file_with_and_without_ids(tmp_path: Path) -> None:
    path = tmp_path / "a.smi"
    path.write_text("CCN amine one\nCCO\n\nCC(\tbad\n", encoding="utf-8")
    found = read_blocks(path)
    assert [(b.id, b.smiles, b.row) for b in found] == [("amine one", "CCN", 1), ("row 2", "CCO", 2)]
    assert [i.row for i in found.rejected] == [4]


def sdf(names: list[str]) -> str:
    records = []
    for name, (_, smiles, _) in zip(names, ROWS, strict=True):
        mol = Chem.MolFromSmiles(smiles)
        AllChem.Compute2DCoords(mol)
        mol.SetProp("_Name", name)
        records.append(Chem.MolToMolBlock(mol) + f">  <Cat. No.>\n{name}-x\n\n>  <Note>\ntwo\nlines\n\n$$$$\n")
    return "".join(records)


def test_sdf_keeps_titles_fields_and_wedges(tmp_path: Path) -> None:
    path = tmp_path / "a.sdf"
    path.write_text(sdf(["007", "B", "C", "D", "E"]), encoding="utf-8")
    found = read_blocks(path, mapping={"id": "Cat. No."})
    assert [b.smiles for b in found] == PARENTS
    assert [b.id for b in found] == ["007-x", "B-x", "C-x", "D-x", "E-x"]
    assert [b.row for b in found] == [1, 2, 3, 4, 5]
    assert dict(found["B-x"].columns)["Note"] == "two\nlines"


def test_sdf_with_a_damaged_record_keeps_the_others(tmp_path: Path) -> None:
    records = sdf(["A", "B", "C", "D", "E"]).split("$$$$\n")
    records[1] = "B\n\n\n  9  9 junk\nM  END\n"
    path = tmp_path / "a.sdf"
    path.write_text("$$$$\n".join(records), encoding="utf-8")
    found = read_blocks(path)
    assert len(found) == 4
    assert [i.row for i in found.rejected] == [2]


def test_columns_are_found_by_name_first_and_content_second() -> None:
    by_name = read_blocks(pandas.DataFrame({"Canonical SMILES": ["CCN"], "Compound ID": ["X1"], "other": ["CCO"]}))
    assert (by_name.columns.structure, by_name.columns.id) == ("Canonical SMILES", "Compound ID")
    by_content = read_blocks(pandas.DataFrame({"drawing": ["CCN", "CCO"], "Barcode": ["1", "2"]}))
    assert by_content.columns.structure == "drawing"


def test_a_telling_name_over_catalogue_numbers_loses_to_real_structures() -> None:
    found = read_blocks(pandas.DataFrame({"structure": ["12-345", "12-346"], "drawn": ["CCN", "CCO"]}))
    assert found.columns.structure == "drawn"


def test_mapping_overrules_and_a_wrong_one_is_explained() -> None:
    frame = pandas.DataFrame({"smiles": ["CCN"], "better": ["CCO"]})
    assert next(iter(read_blocks(frame, mapping={"structure": "better"}))).smiles == "CCO"
    with pytest.raises(InputError, match="nowhere"):
        read_blocks(frame, mapping={"structure": "nowhere"})


@pytest.mark.parametrize(
    ("name", "content", "word"),
    [
        ("none.csv", None, "no such file"),
        ("empty.csv", b"", "empty"),
        ("blank.csv", b"  \n \n", "empty"),
        ("header.csv", b"id,smiles\n", "no row"),
        ("list.docx", b"x", "not known"),
        ("words.csv", b"id,what\n1,hello there\n2,good bye\n", "no column"),
        ("bad.csv", b"id,smiles\n1,C1CC\n2,CC(\n", "none of its 2 rows"),
    ],
)
def test_unusable_files_are_refused_with_a_sentence(
    tmp_path: Path, name: str, content: bytes | None, word: str
) -> None:
    path = tmp_path / name
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(InputError) as caught:
        read_blocks(path)
    assert word in str(caught.value)
    assert name in str(caught.value)


def test_a_file_without_a_usable_row_lists_the_rows() -> None:
    with pytest.raises(InputError) as caught:
        read_blocks(pandas.DataFrame({"smiles": ["C1CC", "", "CC(C)(C)(C)C"]}), mapping={"structure": "smiles"})
    assert [i.row for i in caught.value.issues] == [2, 3, 4]


# --- book-keeping -----------------------------------------------------------------

CELLS = st.one_of(
    st.sampled_from(
        ["CCN", "NCC", "CCO", "C1CC", "CCN.Cl", "", " ", "c1ccccc1", "CC(=O)O", "[Na+].[O-]C", "*C", "CCBr"]
    ),
    st.text(max_size=12),
    st.text(alphabet="CNOclnos[]()=#@+-.1234%HBr/\\ ", max_size=20),
)
IDS = st.text(max_size=6)


@given(cells=st.lists(st.tuples(IDS, CELLS), min_size=1, max_size=12))
def test_rows_in_are_blocks_duplicates_and_rejected(cells: list[tuple[str, str]]) -> None:
    """Whatever stands in the cells, every row has exactly one fate."""
    frame = pandas.DataFrame({"id": [c[0] for c in cells], "smiles": [c[1] for c in cells]})
    mapping = {"structure": "smiles", "id": "id"}
    try:
        found = read_blocks(frame, mapping=mapping)
    except InputError as error:
        assert {i.row for i in error.issues} == set(range(2, len(cells) + 2))
        return
    fates = [b.row for b in found] + [i.row for i in (*found.duplicates, *found.rejected)]
    assert sorted(fates) == list(range(2, len(cells) + 2))
    assert found.rows_in == len(cells)
    assert len({b.id for b in found}) == len(found)
    assert len({b.smiles for b in found}) == len(found)
    for block in found:
        given_id = cells[block.row - 2][0]
        assert block.id == (given_id if given_id.strip() else f"row {block.row}")
        assert Chem.CanonSmiles(block.smiles) == block.smiles
    assert len(found.issues) == len(found.duplicates) + len(found.rejected)


@given(data=st.binary(max_size=300))
def test_random_bytes_are_read_or_refused_never_crash(tmp_path_factory: pytest.TempPathFactory, data: bytes) -> None:
    folder = tmp_path_factory.mktemp("bytes")
    for name in ("a.csv", "a.smi", "a.sdf", "a.tsv"):
        path = folder / name
        path.write_bytes(data)
        try:
            found = read_blocks(path)
        except InputError as error:
            assert name in str(error)
        else:
            assert len(found) >= 1


@given(garbage=st.text(alphabet=st.characters(codec="utf-8"), max_size=60))
def test_garbage_in_one_cell_leaves_the_others_alone(tmp_path_factory: pytest.TempPathFactory, garbage: str) -> None:
    path = tmp_path_factory.mktemp("cell") / "a.csv"
    path.write_bytes(table_text(",", [("A", "CCN", garbage), ("B", "CCO", "")]).encode())
    found = read_blocks(path)
    assert {b.id: b.smiles for b in found} == {"A": "CCN", "B": "CCO"}
    assert found.rows_in == 2


@pytest.mark.parametrize(
    "header",
    [
        "amount (mg",
        "MW (g/mol",
        "x ('",
        "amount (1 2)",
        "amount [mg/0]",
        "amount (m**1e999)",
        "stock [",
        "%",
        "{",
        "a'b",
    ],
)
def test_odd_column_names_do_not_stop_the_reader(header: str) -> None:
    """A bracket that was never closed is a typing slip, not a reason to refuse a list."""
    found = read_blocks(pandas.DataFrame({"smiles": ["CCN"], "id": ["A"], header: ["1"]}))
    assert [b.id for b in found] == ["A"]
    assert dict(found["A"].columns)[header] == "1"


@pytest.mark.parametrize(
    "cell", ["5 (mg", "5 mg/0", "5 {", "5 g**1e999", "5 mg'", "1e400 mg", "nan", "inf mg", "5 [mg", "5 **"]
)
def test_odd_amounts_do_not_stop_the_reader(cell: str) -> None:
    found = read_blocks(pandas.DataFrame({"smiles": ["CCN", "CCO"], "id": ["A", "B"], "amount": ["2 mg", cell]}))
    assert [b.id for b in found] == ["A", "B"]
    assert dict(found["B"].columns)["amount"] == cell


@given(cell=st.text(max_size=8), header=st.text(max_size=8))
def test_any_text_may_stand_in_an_amount_column(cell: str, header: str) -> None:
    frame = pandas.DataFrame([["CCN", f"5 {cell}", "x"]], columns=["smiles", "amount", f"stock ({header})"])
    assert read_blocks(frame).rows_in == 1


@pytest.mark.parametrize(("header", "cell"), [("amount (9**9**9)", "1"), ("amount", "5 m**9**9**9")])
def test_text_is_never_computed(root_folder: Path, header: str, cell: str) -> None:
    """9**9**9 has 370 million digits: whoever evaluates it waits for minutes and gigabytes.

    In a process of its own, because the wait cannot be interrupted; reading
    takes about a second there, imports included.
    """
    program = (
        "import pandas; from libtool.blocks import read_blocks; "
        f"print(len(read_blocks(pandas.DataFrame({{'smiles': ['CCN'], {header!r}: [{cell!r}]}}))))"
    )
    done = subprocess.run([sys.executable, "-c", program], cwd=root_folder, capture_output=True, text=True, timeout=15)
    assert done.stdout.strip() == "1", done.stderr[-300:]
