"""A scene drawn with py3Dmol, for a plain notebook cell.

py3Dmol fetches its JavaScript from a public host unless the page has it
already. The view returned here brings the library along, so it works without
a network and in a notebook that is opened again later.
"""

from __future__ import annotations

from html import escape

import py3Dmol

from libtool.approach.scene import LEGEND, Scene
from libtool.assets.inline import loader_html

__all__ = ["OfflineView", "draw"]


class OfflineView(py3Dmol.view):  # type: ignore[misc]
    """py3Dmol view whose HTML carries 3Dmol.js.

    `sentence` says in words what the picture shows.
    """

    def __init__(self, scene: Scene, *, width: int, height: int) -> None:
        super().__init__(width=width, height=height, js="")
        self.sentence = scene.sentence
        self._width = width
        for name, arguments in scene.calls:
            getattr(self, name)(*arguments)

    def _make_html(self) -> str:
        return loader_html() + str(super()._make_html())

    def _repr_html_(self) -> str:
        """The picture, its legend, and the sentence that says the same."""
        dots = "".join(
            '<li style="margin-right:14px"><span style="display:inline-block;width:10px;height:10px;'
            f'border-radius:50%;margin-right:5px;background:{colour}"></span>{escape(meaning)}</li>'
            for colour, meaning in LEGEND
        )
        legend = f'<ul style="list-style:none;display:flex;flex-wrap:wrap;padding:0;margin:2px 0">{dots}</ul>'
        words = f'<p style="margin:2px 0">{escape(self.sentence)}</p>'
        return f'{self._make_html()}<div style="max-width:{self._width}px;font-size:13px">{legend}{words}</div>'


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
