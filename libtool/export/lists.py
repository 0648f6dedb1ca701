"""Pairs, wells and products as CSV, and what the files were made from."""

from __future__ import annotations

import json

from libtool import __version__
from libtool.blocks import BlockSet
from libtool.export.files import Cell, csv_text
from libtool.export.standing import choice_counts, choice_in_force, why
from libtool.plate import PlateMap
from libtool.records import Product, Verdict
from libtool.reference.tables import fingerprint
from libtool.triage import Pair, Session

__all__ = ["PRODUCT_FIELDS", "about_text", "pairs_text", "plate_text", "product_cells", "products_text", "wells_of"]

PRODUCT_FIELDS = (
    "plate", "well", "nucleophile", "electrophile", "rank", "products_of_pair", "smiles", "formula", "exact_mass",
    "share", "confidence", "stereo", "reason",
)  # fmt: skip
"""Columns of products.csv and properties of products.sdf."""

_DECIDED = ("choice", "why", "note", "who", "when")
_WELL = (
    "nucleophile_name", "nucleophile_smiles", "electrophile_name", "electrophile_smiles", "product", "formula",
    "exact_mass", "products_of_pair", "verdict", "flags", "hazards",
)  # fmt: skip
Place = tuple[int, str]


def wells_of(plate_map: PlateMap) -> dict[tuple[str, str], Place]:
    """Plate (from 1) and well name of each pair, by ids."""
    return {(w.nucleophile, w.electrophile): (w.plate, w.name) for w in plate_map.wells}


def pairs_text(session: Session) -> str:
    """CSV of all pairs: the columns of `Library.frame`, then the choice in force and who decided it."""
    frame = session.library.frame()
    # A remedy is an instruction, and a refused pair gets none.
    frame.loc[frame["verdict"] == Verdict.REFUSED.value, "remedies"] = ""
    rows = [
        (*cells, *_decided(session, pair))
        for pair, cells in zip(session.library, frame.itertuples(index=False, name=None), strict=True)
    ]
    return csv_text((*map(str, frame.columns), *_DECIDED), rows)


def _decided(session: Session, pair: Pair) -> tuple[str, ...]:
    decision = session.state.decisions.get(pair.key)
    told = (decision.note, decision.who, decision.when) if decision else ("", "", "")
    return (choice_in_force(session, pair).value, why(session, pair), *told)


def plate_text(session: Session, plate_map: PlateMap) -> str:
    """CSV of the wells: the columns of `PlateMap.frame`, then what is in the well."""
    frame = plate_map.frame()
    rows = [
        (*cells, *_well(session.pair((well.nucleophile, well.electrophile))))
        for well, cells in zip(plate_map.wells, frame.itertuples(index=False, name=None), strict=True)
    ]
    return csv_text((*map(str, frame.columns), *_WELL), rows)


def _well(pair: Pair) -> tuple[Cell, ...]:
    best = pair.products[0] if pair.products else None
    return (
        pair.nucleophile.name,
        pair.nucleophile.smiles,
        pair.electrophile.name,
        pair.electrophile.smiles,
        best.smiles if best else "",
        best.formula if best else "",
        f"{best.exact_mass:.5f}" if best else "",
        len(pair.products),
        pair.verdict.value,
        "; ".join(f.title for f in pair.flags),
        "; ".join(f"{h.level.value}: {h.what}" for h in pair.hazards),
    )


def products_text(session: Session, plate_map: PlateMap) -> str:
    """CSV of every product that the pairs to make can give, the likeliest of a pair first."""
    places = wells_of(plate_map)
    rows = [product_cells(pair, product, places[pair.key]) for pair in session.to_make() for product in pair.products]
    return csv_text(PRODUCT_FIELDS, rows)


def product_cells(pair: Pair, product: Product, place: Place) -> tuple[Cell, ...]:
    """One product under `PRODUCT_FIELDS`."""
    return (
        *place,
        *pair.key,
        product.rank,
        len(pair.products),
        product.smiles,
        product.formula,
        f"{product.exact_mass:.5f}",
        f"{product.probability:.3f}",
        product.confidence.value,
        product.stereo,
        product.reason,
    )


def about_text(session: Session, plate_map: PlateMap) -> str:
    """JSON that says from what, with what and for what the other files were made."""
    library = session.library
    counts = choice_counts(session)
    known = {
        "tool": f"waldenbench {__version__}",
        "tables": fingerprint()[:12],
        "solvent": library.conditions.solvent,
        "temperature_celsius": library.conditions.temperature_celsius,
        "nucleophiles": _input(library.nucleophiles),
        "electrophiles": _input(library.electrophiles),
        "pairs": {
            "all": len(library),
            **{choice.value: count for choice, count in counts.items()},
            "refused": sum(pair.verdict is Verdict.REFUSED for pair in library),
        },
        "plate": {"format": plate_map.format.wells, "plates": plate_map.plates, "wells": len(plate_map.wells)},
        "csv": "UTF-8; a byte order mark only in files with letters beyond ASCII. Text that begins like a formula "
        "has an apostrophe in front.",
    }
    return json.dumps(known, indent=2, ensure_ascii=False) + "\n"


def _input(blocks: BlockSet) -> dict[str, str | int]:
    return {
        "file": blocks.name,
        "sha256": blocks.sha256,
        "rows": blocks.rows_in,
        "usable": len(blocks),
        "duplicates": len(blocks.duplicates),
        "rejected": len(blocks.rejected),
        "structure_column": blocks.columns.structure,
        "id_column": blocks.columns.id,
    }
