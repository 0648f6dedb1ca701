"""From a messy list to building blocks, with every row accounted for.

`rows` turns a file of any supported format into numbered rows, `columns`
finds the structure and id columns, `clean` makes the parent structure, and
`read` puts them together into a `BlockSet`.
"""

from libtool.blocks.blockset import BlockSet
from libtool.blocks.read import read_blocks

__all__ = ["BlockSet", "read_blocks"]
