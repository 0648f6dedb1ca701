"""The lists that leave the house, read back with other programs' readers."""

from __future__ import annotations

import csv
import errno
import io
import json
import os
from pathlib import Path

import pandas
import pytest
from hypothesis import given
from hypothesis import strategies as st
from rdkit import Chem
from rdkit.Chem import Descriptors, rdMolDescriptors

from libtool.blocks import read_blocks
from libtool.errors import LayoutError
from libtool.export import FILE_NAMES, write_all, write_reagents
from libtool.export.files import csv_text, guarded, write_together
from libtool.export.reagents import PREFIX
from libtool.records import Choice, Conditions
from libtool.triage import Journal, Session, build_library

FORMULA = "=cmd|' /C calc'!A0"
# Code 007 must keep its zeros, -1.5 must stay a number, the note must not run.
NUCLEOPHILES = f"""Code,Name,SMILES,Offset,Note
007,piperidine hydrochloride,C1CCNCC1.Cl,-1.5,"{FORMULA}"
N2,benzylamine,NCc1ccccc1,+2,@home
N3,aniline,Nc1ccccc1,3,"comma, ""quote"" and µ"
N4,3-methylpyrazole,Cc1cc[nH]n1,4,
N5,phenol,Oc1ccccc1,5,-
"""
ELECTROPHILES = """id,name,smiles
E1,1-bromopropane,CCCBr
E2,isobutyl bromide,CC(C)CBr
E3,isobutyl chloride,CC(C)CCl
E4,neopentyl bromide,CC(C)(C)CBr
E5,tert-butyl bromide,CC(C)(C)Br
E6,(S)-2-pentyl mesylate,CCC[C@H](C)OS(C)(=O)=O
E7,1-butanol,CCCCO
E8,bromobenzene,Brc1ccccc1
E9,1-bromoadamantane,BrC12CC3CC(CC(C3)C1)C2
E10,chloromethyl methyl ether,COCCl
E11,unreadable,C1CC(
E12,the first again,BrCCC
E13,crotyl bromide of no drawn geometry,CC=CCBr
E14,(E)-cinnamyl bromide,BrC/C=C/c1ccccc1
"""
LISTS = {"nucleophiles": NUCLEOPHILES, "electrophiles": ELECTROPHILES}


def make_session(folder: Path, conditions: Conditions | None = None) -> Session:
    folder.mkdir(parents=True, exist_ok=True)
    for name, text in LISTS.items():
        folder.joinpath(f"{name}.csv").write_text(text, encoding="utf-8")
    lists = [read_blocks(folder / f"{name}.csv") for name in LISTS]
    return Session(build_library(lists[0], lists[1], conditions), Journal(folder / "decisions.sqlite", who="anna"))


@pytest.fixture(scope="module")
def session(tmp_path_factory: pytest.TempPathFactory) -> Session:
    """Nobody decides in this one."""
    return make_session(tmp_path_factory.mktemp("project"))


@pytest.fixture(scope="module")
def out(session: Session, tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("out") / "made"
    write_all(session, folder, 96)
    return folder


def rows_of(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8-sig", newline="") as stream:
        return list(csv.DictReader(stream))


def input_rows(name: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(LISTS[name])))


def records_of(path: Path) -> list[Chem.Mol]:
    found = list(Chem.SDMolSupplier(str(path)))
    assert None not in found
    return found


def identity(session: Session, key: tuple[str, str]) -> tuple[str, str, str, str]:
    pair = session.pair(key)
    return *key, pair.nucleophile.smiles, pair.electrophile.smiles


def test_progress_counts_every_structure_once(session: Session, tmp_path: Path) -> None:
    seen: list[tuple[int, int]] = []
    write_all(session, tmp_path, 96, progress=lambda done, total: seen.append((done, total)))
    records = len(records_of(tmp_path / "products.sdf"))
    flagged = {p.electrophile.id for p in session.library if p.electrophile.id not in {"E1", "E10"}}
    assert seen == [(n, records + len(flagged)) for n in range(1, records + len(flagged) + 1)]


def test_exactly_the_named_files_are_written(out: Path) -> None:
    assert {path.name for path in out.iterdir()} == set(FILE_NAMES)


@pytest.mark.parametrize("name", LISTS)
def test_no_row_is_lost(name: str, out: Path) -> None:
    unused = [int(row["row"]) for row in rows_of(out / "rejected_rows.csv") if row["list"] == name]
    listed = [
        int(row[f"{PREFIX}row"]) for part in ("filtered", "left_out") for row in rows_of(out / f"{name}_{part}.csv")
    ]
    # The header is row 1 of a spreadsheet.
    assert sorted(unused + listed) == list(range(2, len(input_rows(name)) + 2))


@pytest.mark.parametrize("name", LISTS)
def test_input_columns_come_first_and_unchanged(name: str, out: Path) -> None:
    given_rows = input_rows(name)
    columns = list(given_rows[0])
    for part in ("filtered", "left_out"):
        for row in rows_of(out / f"{name}_{part}.csv"):
            original = given_rows[int(row[f"{PREFIX}row"]) - 2]
            assert list(row)[: len(columns)] == columns
            guard_off = {c: row[c].removeprefix("'") for c in columns}
            assert guard_off == original


def test_only_reagents_with_a_pair_to_make_are_to_be_taken(session: Session, out: Path) -> None:
    made = {pair.electrophile.id for pair in session.to_make()}
    taken = rows_of(out / "electrophiles_filtered.csv")
    left = rows_of(out / "electrophiles_left_out.csv")
    assert {row["id"] for row in taken} == made == {"E1", "E2", "E6", "E13", "E14"}
    assert {row["id"] for row in left} == {"E3", "E4", "E5", "E7", "E8", "E9", "E10"}
    assert {row[f"{PREFIX}decision"] for row in taken} == {"take"}
    assert {row[f"{PREFIX}decision"] for row in left} == {"leave out"}
    by_id = {row["id"]: row for row in left}
    assert "neopentyl" in by_id["E4"][f"{PREFIX}why"]
    assert "E2" in by_id["E3"][f"{PREFIX}remedies"]
    assert "Streitwieser" in by_id["E4"][f"{PREFIX}sources"]


def test_a_reagent_with_parked_pairs_waits(tmp_path: Path) -> None:
    session = make_session(tmp_path)
    session.decide([("007", "E4")], Choice.PARK, "ask for the iodide")
    write_reagents(session, tmp_path / "out")
    (row,) = [r for r in rows_of(tmp_path / "out" / "electrophiles_left_out.csv") if r["id"] == "E4"]
    assert row[f"{PREFIX}decision"] == "wait"
    assert "decided by anna: ask for the iodide" in row[f"{PREFIX}why"]


def test_cells_survive_a_spreadsheet(out: Path) -> None:
    frame = pandas.read_csv(out / "nucleophiles_filtered.csv", dtype={"Code": str})
    first = frame.iloc[0]
    assert first["Code"] == "007"
    assert first["Note"] == f"'{FORMULA}"
    assert frame["Note"][1] == "'@home"
    assert frame["Note"][2] == 'comma, "quote" and µ'
    # One text among the numbers would turn the whole column into text.
    assert frame["Offset"].dtype.kind == "f"
    assert list(frame["Offset"]) == [-1.5, 2.0, 3.0, 4.0, 5.0]


@given(st.lists(st.text(alphabet=st.characters(codec="utf-8", exclude_characters="\x00"), max_size=12), min_size=2))
def test_any_text_comes_back_from_csv_and_none_is_a_formula(cells: list[str]) -> None:
    text = csv_text(["a"] * len(cells), [cells])
    _, read = csv.reader(io.StringIO(text.removeprefix("\ufeff"), newline=""))
    for before, after in zip(cells, read, strict=True):
        assert after in {before, f"'{before}"}
        if after[:1] in {"=", "+", "-", "@", "\t", "\r"}:
            float(after.replace(",", "."))


def test_a_byte_order_mark_only_where_it_is_needed(tmp_path: Path) -> None:
    write_together(tmp_path, {"plain.csv": csv_text(["a"], [["b"]]), "letters.csv": csv_text(["a"], [["°C"]])})
    assert (tmp_path / "plain.csv").read_bytes() == b"a\r\nb\r\n"
    assert (tmp_path / "letters.csv").read_bytes().startswith(b"\xef\xbb\xbf")
    assert pandas.read_csv(tmp_path / "letters.csv")["a"][0] == "°C"


def test_numbers_are_never_guarded() -> None:
    assert [guarded(cell) for cell in (-1.5, -3, "-2e-3", "+7", "-1,5")] == [-1.5, -3, "-2e-3", "+7", "-1,5"]


def test_a_refused_reagent_gets_no_well_product_or_condition(out: Path) -> None:
    for name in ("plate.csv", "products.csv", "electrophiles_filtered.csv"):
        assert "E10" not in (out / name).read_text("utf-8")
    assert all(mol.GetProp("electrophile") != "E10" for mol in records_of(out / "products.sdf"))
    pairs = [row for row in rows_of(out / "pairs.csv") if row["electrophile"] == "E10"]
    assert len(pairs) == 5
    for row in pairs:
        assert (row["verdict"], row["choice"]) == ("refused", "skip")
        assert [row[c] for c in ("product", "remedies", "log10_k_rel", "low", "high")] == [""] * 5
    (left,) = [r for r in rows_of(out / "electrophiles_left_out.csv") if r["id"] == "E10"]
    assert left[f"{PREFIX}remedies"] == ""
    assert "Not to be used here" in left[f"{PREFIX}hazards"]


def test_an_old_decision_to_make_does_not_lift_a_refusal(tmp_path: Path) -> None:
    session = make_session(tmp_path)
    # Written past the session, as a version with fewer cautions would have.
    session.journal.record([identity(session, ("007", "E10"))], Choice.MAKE, "older")
    session.reload()
    write_all(session, tmp_path / "out", 96)
    (row,) = [
        r for r in rows_of(tmp_path / "out" / "pairs.csv") if (r["nucleophile"], r["electrophile"]) == ("007", "E10")
    ]
    assert row["choice"] == "skip"
    assert "E10" not in (tmp_path / "out" / "plate.csv").read_text("utf-8")
    counts = json.loads((tmp_path / "out" / "about.json").read_text("utf-8"))["pairs"]
    assert counts["all"] == counts["make"] + counts["park"] + counts["skip"] == 60


def test_sdf_and_csv_hold_the_same_products(out: Path) -> None:
    listed = rows_of(out / "products.csv")
    records = records_of(out / "products.sdf")
    assert len(records) == len(listed) > 20
    for mol, row in zip(records, listed, strict=True):
        assert mol.GetPropsAsDict(autoConvertStrings=False) == row
        assert Chem.MolToSmiles(mol) == row["smiles"]
        assert not mol.GetConformer().Is3D()


def test_formula_and_mass_are_those_of_the_smiles(out: Path) -> None:
    for row in (*rows_of(out / "products.csv"), *({**r, "smiles": r["product"]} for r in rows_of(out / "plate.csv"))):
        mol = Chem.MolFromSmiles(row["smiles"])
        assert row["formula"] == rdMolDescriptors.CalcMolFormula(mol)
        # Five decimals are written.
        assert float(row["exact_mass"]) == pytest.approx(Descriptors.ExactMolWt(mol), abs=6e-6)


def test_the_sulfonate_is_inverted_and_undrawn_geometry_stays_undrawn(out: Path) -> None:
    products = {(r["nucleophile"], r["electrophile"]): r["smiles"] for r in rows_of(out / "products.csv")}
    # Same order of neighbours as the mesylate CCC[C@H](C)O..., the other hand.
    assert products["007", "E6"] == Chem.CanonSmiles("CCC[C@@H](C)N1CCCCC1")
    assert products["007", "E13"] == Chem.CanonSmiles("CC=CCN1CCCCC1")
    assert products["007", "E14"] == Chem.CanonSmiles("C(N1CCCCC1)/C=C/c1ccccc1")


def test_wells_pairs_and_products_agree(session: Session, out: Path) -> None:
    plate = rows_of(out / "plate.csv")
    wells = {(row["plate"], row["well"]) for row in plate}
    made = {(r["nucleophile"], r["electrophile"]) for r in rows_of(out / "pairs.csv") if r["choice"] == "make"}
    assert len(wells) == len(plate) == len(made) == len(session.to_make())
    assert {(row["nucleophile"], row["electrophile"]) for row in plate} == made
    place = {(row["nucleophile"], row["electrophile"]): (row["plate"], row["well"]) for row in plate}
    shares: dict[tuple[str, str], list[float]] = {}
    for row in rows_of(out / "products.csv"):
        key = row["nucleophile"], row["electrophile"]
        assert place[key] == (row["plate"], row["well"])
        shares.setdefault(key, []).append(float(row["share"]))
        assert len(shares[key]) == int(row["rank"])
    # Three decimals are written for each product.
    assert all(sum(s) == pytest.approx(1, abs=0.0006 * len(s)) for s in shares.values())
    assert len(shares["N4", "E1"]) == 2


def test_decisions_reach_every_list(tmp_path: Path) -> None:
    session = make_session(tmp_path)
    session.decide([("007", "E1")], Choice.SKIP, FORMULA)
    session.decide([("N2", "E4")], Choice.MAKE, "worth a try")
    write_all(session, tmp_path / "out", 384)
    pairs = {(r["nucleophile"], r["electrophile"]): r for r in rows_of(tmp_path / "out" / "pairs.csv")}
    assert pairs["007", "E1"]["choice"] == "skip"
    assert pairs["007", "E1"]["note"] == f"'{FORMULA}"
    assert (pairs["N2", "E4"]["choice"], pairs["N2", "E4"]["who"]) == ("make", "anna")
    assert pairs["N2", "E4"]["when"].startswith(("20", "21"))
    placed = {(r["nucleophile"], r["electrophile"]) for r in rows_of(tmp_path / "out" / "plate.csv")}
    assert ("N2", "E4") in placed
    assert ("007", "E1") not in placed
    assert "E4" in {r["id"] for r in rows_of(tmp_path / "out" / "electrophiles_filtered.csv")}


def test_two_runs_give_the_same_bytes(tmp_path: Path, out: Path) -> None:
    write_all(make_session(tmp_path), tmp_path / "again", 96)
    for name in FILE_NAMES:
        assert (tmp_path / "again" / name).read_bytes() == (out / name).read_bytes(), name


def test_the_files_say_what_they_were_made_with(tmp_path: Path) -> None:
    session = make_session(tmp_path, Conditions(solvent="acetonitrile", temperature_celsius=25.0))
    write_all(session, tmp_path / "out", 24)
    about = json.loads((tmp_path / "out" / "about.json").read_text("utf-8"))
    assert (about["solvent"], about["temperature_celsius"]) == ("acetonitrile", 25.0)
    assert len(about["tables"]) == 12
    assert about["electrophiles"]["rows"] == 14
    # 5 nucleophiles x 5 electrophiles on plates of 4 x 6.
    assert about["plate"] == {"format": 24, "plates": 2, "wells": 25}


def test_ids_that_look_like_the_marks_of_sdf_break_no_record(tmp_path: Path) -> None:
    ids = ["$$$$", "a\n\n>  <b>\nc", "> <d>"]
    nucleophiles = read_blocks(pandas.DataFrame({"id": ids, "smiles": ["C1CCNCC1", "NCc1ccccc1", "CCCS"]}))
    electrophiles = read_blocks(pandas.DataFrame({"id": ["E1"], "smiles": ["CCCBr"]}))
    session = Session(build_library(nucleophiles, electrophiles), Journal(tmp_path / "d.sqlite", who="anna"))
    write_all(session, tmp_path, 96)
    records = records_of(tmp_path / "products.sdf")
    assert [mol.GetProp("nucleophile") for mol in records] == ["'$$$$", "a > <b> c", "'> <d>"]


def test_an_sdf_list_keeps_its_structures(tmp_path: Path) -> None:
    with Chem.SDWriter(str(tmp_path / "halides.sdf")) as writer:
        for number, smiles in enumerate(("CCCBr", "CCC[C@H](C)Br"), start=1):
            mol = Chem.MolFromSmiles(smiles)
            Chem.rdDepictor.Compute2DCoords(mol)
            mol.SetProp("Cat. No.", f"H{number}")
            writer.write(mol)
    nucleophiles = read_blocks(pandas.DataFrame({"id": ["N1"], "smiles": ["C1CCNCC1"]}))
    electrophiles = read_blocks(tmp_path / "halides.sdf")
    session = Session(build_library(nucleophiles, electrophiles), Journal(tmp_path / "d.sqlite", who="anna"))
    write_reagents(session, tmp_path)
    again = read_blocks(tmp_path / "electrophiles_filtered.csv")
    assert [(b.id, b.smiles) for b in again] == [(b.id, b.smiles) for b in electrophiles]


def test_a_filtered_list_can_go_through_again(tmp_path: Path) -> None:
    first = make_session(tmp_path)
    write_reagents(first, tmp_path / "one")
    lists = [read_blocks(tmp_path / "one" / f"{name}_filtered.csv") for name in LISTS]
    second = Session(build_library(lists[0], lists[1]), Journal(tmp_path / "two.sqlite", who="anna"))
    assert {p.key for p in second.to_make()} == {p.key for p in first.to_make()}
    write_reagents(second, tmp_path / "two")
    header = list(rows_of(tmp_path / "two" / "nucleophiles_filtered.csv")[0])
    assert f"{PREFIX}id (2)" in header
    assert len(header) == 5 + 2 * 12


def test_an_unknown_plate_is_refused_before_anything_is_written(session: Session, tmp_path: Path) -> None:
    with pytest.raises(LayoutError, match="received 100"):
        write_all(session, tmp_path / "out", 100)
    assert not (tmp_path / "out").exists()


def test_a_full_disk_leaves_the_files_of_the_run_before(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    write_together(tmp_path, {"a.csv": "old a", "b.csv": "old b"})
    written: list[int] = []

    def full(descriptor: int) -> None:
        written.append(descriptor)
        if len(written) == 2:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(OSError, match="No space left"):
        write_together(tmp_path, {"a.csv": "new a", "b.csv": "new b"})
    assert {path.name: path.read_text() for path in tmp_path.iterdir()} == {"a.csv": "old a", "b.csv": "old b"}


def test_a_folder_in_the_way_is_named(tmp_path: Path) -> None:
    (tmp_path / "b.csv").mkdir()
    with pytest.raises(IsADirectoryError) as caught:
        write_together(tmp_path, {"a.csv": "a", "b.csv": "b"})
    assert caught.value.filename == str(tmp_path / "b.csv")
    assert [path.name for path in tmp_path.iterdir()] == ["b.csv"]
