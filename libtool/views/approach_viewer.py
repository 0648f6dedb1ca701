"""The 3D approach in the notebook: one viewer whose scene is swapped."""

from __future__ import annotations

import html
from importlib import resources

import anywidget
import traitlets

from libtool.approach.scene import LEGEND, Scene
from libtool.assets.inline import scene_script
from libtool.assets.threedmol import script_gzip

__all__ = ["ApproachViewer"]


def _module() -> str:
    """JavaScript of the viewer, with the shared scene code in front."""
    own = resources.files("libtool.views").joinpath("approach_viewer.js").read_text("utf-8")
    return f"{scene_script()}\n{own}"


class ApproachViewer(anywidget.AnyWidget):
    """Shows one scene at a time.

    `show` replaces the picture, `clear` empties it. The picture is also said
    in words below it, for those who cannot see it and where WebGL is missing.
    """

    _esm = _module()
    _calls: traitlets.List = traitlets.List().tag(sync=True)
    _model_words = traitlets.Unicode().tag(sync=True)
    _sentence = traitlets.Unicode().tag(sync=True)
    _legend: traitlets.List = traitlets.List().tag(sync=True)
    _library = traitlets.Bytes().tag(sync=True)
    height = traitlets.Int(360).tag(sync=True)

    def __init__(self, **settings: object) -> None:
        super().__init__(
            _library=script_gzip(),
            _legend=[[colour, meaning] for colour, meaning in LEGEND],
            _sentence="Select a well to see the back side of its electrophile.",
            **settings,
        )

    def show(self, scene: Scene, model: str = "") -> None:
        """Draw a scene; `model` says what was computed."""
        with self.hold_sync():
            self._sentence = scene.sentence
            self._model_words = model
            self._calls = [[name, list(arguments)] for name, arguments in scene.calls]

    def clear(self, sentence: str) -> None:
        """Take the picture away and say why."""
        with self.hold_sync():
            self._sentence = sentence
            self._model_words = ""
            self._calls = []

    def _repr_html_(self) -> str:
        return f"<p>{html.escape(self._sentence)}</p>"
