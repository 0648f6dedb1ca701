"""All files of a triage in one go."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from libtool.export.files import write_together
from libtool.export.lists import about_text, pairs_text, plate_text, products_text
from libtool.export.reagents import reagent_files
from libtool.export.report import MOST_VIEWS, flagged_electrophiles, report_text
from libtool.export.sdf import products_sdf
from libtool.plate import lay_out, plate_format
from libtool.triage import Session

__all__ = ["FILE_NAMES", "write_all"]

FILE_NAMES = (
    "report.html",
    "nucleophiles_filtered.csv",
    "electrophiles_filtered.csv",
    "nucleophiles_left_out.csv",
    "electrophiles_left_out.csv",
    "rejected_rows.csv",
    "pairs.csv",
    "plate.csv",
    "products.csv",
    "products.sdf",
    "about.json",
)
"""Every file that `write_all` writes, the one to open first at the front."""


def write_all(
    session: Session, folder: str | Path, wells: int = 96, *, progress: Callable[[int, int], None] | None = None
) -> tuple[Path, ...]:
    """Write lists, plate, products and report of a session.

    Everything is made before anything is written, and the files of an earlier
    run are replaced together.

    Parameters
    ----------
    session : Session
    folder : path
        Made when missing.
    wells : int
        Wells of the plate, a known format.
    progress : callable, optional
        Called with (structures drawn, structures in all): the pictures of the
        report, then the products.

    Returns
    -------
    tuple of Path
        In the order of `FILE_NAMES`.

    Raises
    ------
    LayoutError
        There is no plate of that many wells.
    OSError
        The folder cannot be written; the older files are left as they were.
    """
    to_make = session.to_make()
    plate_map = lay_out(to_make, plate_format(wells))
    views = min(len(flagged_electrophiles(session)), MOST_VIEWS)
    structures = views + sum(len(pair.products) for pair in to_make)

    def drawn(before: int) -> Callable[[int, int], None]:
        return lambda done, _: progress(before + done, structures) if progress else None

    made = reagent_files(session) | {
        "pairs.csv": pairs_text(session),
        "plate.csv": plate_text(session, plate_map),
        "products.csv": products_text(session, plate_map),
        "about.json": about_text(session, plate_map),
        "report.html": report_text(session, plate_map, progress=drawn(0)),
        "products.sdf": products_sdf(session, plate_map, progress=drawn(views)),
    }
    return write_together(Path(folder), {name: made[name] for name in FILE_NAMES})
