"""3Dmol.js inside the page that shows it.

py3Dmol writes a script that asks a public address for 3Dmol.js, unless the
page already holds the global promise `$3Dmolpromise`. HTML that starts with
`loader_html` sets that promise from the copy it carries. Scripts in an output
run in the order they are written in JupyterLab, Notebook and Voila, and the
promise is set before the first await, so py3Dmol always finds it.
"""

from __future__ import annotations

import base64
from functools import cache
from importlib import resources

from libtool.assets.threedmol import script_gzip

__all__ = ["loader_html", "scene_script"]

_PACKED_SLOT, _SHARED_SLOT = "GZIP_BASE64", "SHARED"


@cache
def loader_html() -> str:
    """Script element that brings 3Dmol.js to the page without a request.

    Put it before the HTML of a py3Dmol view. Further copies on the same page
    do nothing. Needs a browser with DecompressionStream (Chromium 80, Firefox
    113, Safari 16.4); elsewhere a sentence says that no picture can be drawn.

    Returns
    -------
    str
        About 210 kB of HTML.

    Raises
    ------
    LibtoolError
        The package was built without 3Dmol.js.
    """
    loader = resources.files("libtool.assets").joinpath("loader.js").read_text("utf-8")
    # The comment at the top of the loader names the slot as well.
    code = loader[loader.index("(() =>") :].replace(_SHARED_SLOT, scene_script())
    packed = base64.b64encode(script_gzip()).decode("ascii")
    return f"<script>\n{code.replace(_PACKED_SLOT, packed)}</script>\n"


@cache
def scene_script() -> str:
    """Functions `replay` and `loadLibrary` of scene.js, as plain script text for a page or a module."""
    return (
        resources.files("libtool.assets").joinpath("scene.js").read_text("utf-8").replace("export function", "function")
    )
