"""The judgement: flags, hazards and remedies for every pair, and the record of decisions."""

from libtool.triage.journal import Journal
from libtool.triage.library import Library, Pair, build_library
from libtool.triage.session import Session

__all__ = ["Journal", "Library", "Pair", "Session", "build_library"]
