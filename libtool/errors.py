"""What can go wrong on purpose, and nothing else.

Every error that the toolkit raises itself derives from `LibtoolError`, so a
notebook or a script can catch one name. A message says which object, what was
received, which rule it broke and what to do. Rows of a file that cannot be
used do not raise: they come back as `records.RowIssue`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence

    from libtool.records import RowIssue

__all__ = ["ChemistryError", "InputError", "LayoutError", "LibtoolError", "TableError"]


class LibtoolError(Exception):
    """Base of every error the toolkit raises on purpose."""


class InputError(LibtoolError, ValueError):
    """A file, table or setting from the user cannot be used.

    Parameters
    ----------
    message : str
        What was received, which rule it broke, what to do.
    issues : sequence of RowIssue, optional
        The rows at fault, where the input had rows.
    """

    def __init__(self, message: str, issues: Sequence[RowIssue] = ()) -> None:
        super().__init__(message)
        self.issues = tuple(issues)


class LayoutError(LibtoolError, ValueError):
    """The chosen pairs do not fit the plate, or a well name is wrong."""


class ChemistryError(LibtoolError):
    """A structure does not allow what was asked of it."""


class TableError(LibtoolError):
    """A reference table is damaged or lacks the row asked for."""
