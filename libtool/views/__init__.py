"""The notebook screens: plate map, approach viewer, and the triage page that joins them."""

from libtool.views.approach_viewer import ApproachViewer
from libtool.views.plate_grid import PlateGrid
from libtool.views.triage_page import TriagePage

__all__ = ["ApproachViewer", "PlateGrid", "TriagePage"]
