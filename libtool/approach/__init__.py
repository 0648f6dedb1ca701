"""Where the nucleophile comes from and what stands in its way.

`conformers` makes shapes, `geometry` measures their back side, `result` holds
what was found, `scene` describes the picture as plain data, `picture` draws it
with py3Dmol.
"""

from libtool.approach.geometry import approach
from libtool.approach.result import Approach, ConformerApproach, Intruder

__all__ = ["Approach", "ConformerApproach", "Intruder", "approach"]
