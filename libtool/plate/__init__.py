"""From pairs to wells."""

from libtool.plate.formats import PlateFormat, plate_format, plate_formats
from libtool.plate.layout import PlateMap, Well, lay_out

__all__ = ["PlateFormat", "PlateMap", "Well", "lay_out", "plate_format", "plate_formats"]
