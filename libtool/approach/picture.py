"""A scene drawn with py3Dmol, for a plain notebook cell.

py3Dmol fetches its JavaScript from a public host unless the page has it
already. The view returned here brings the library along, so it works without
a network and in a notebook that is opened again later.
"""

from __future__ import annotations

import py3Dmol

from libtool.approach.scene import Scene
from libtool.assets.inline import loader_html

__all__ = ["OfflineView", "draw"]


class OfflineView(py3Dmol.view):  # type: ignore[misc]
    """py3Dmol view whose HTML carries 3Dmol.js.

    `sentence` says in words what the picture shows.
    """

    def __init__(self, scene: Scene, *, width: int, height: int) -> None:
        super().__init__(width=width, height=height, js="")
        self.sentence = scene.sentence
        for name, arguments in scene.calls:
            getattr(self, name)(*arguments)

    def _make_html(self) -> str:
        return loader_html() + str(super()._make_html())


def draw(scene: Scene, *, width: int = 640, height: int = 420) -> OfflineView:
    """py3Dmol view of a scene.

    Parameters
    ----------
    scene : Scene
    width, height : int
        Pixels.

    Returns
    -------
    OfflineView
        Shows itself as the last value of a cell.
    """
    return OfflineView(scene, width=width, height=height)
