"""3Dmol.js as it lies in the package.

The library is not kept in the repository. The build fetches the version that
package.json pins (see build_hook.py) into the folder threedmol/ next to this
file, from where wheel, sdist and editable installs take it.
"""

from __future__ import annotations

import gzip
from functools import cache
from importlib import resources

from libtool.errors import LibtoolError

__all__ = ["licence_text", "script_gzip", "script_text", "version"]

_FOLDER = "threedmol"


@cache
def _read(name: str) -> bytes:
    file = resources.files("libtool.assets").joinpath(_FOLDER, name)
    try:
        return file.read_bytes()
    except FileNotFoundError as missing:
        message = (
            f"3Dmol.js: the file libtool/assets/{_FOLDER}/{name} is missing, so no 3D picture can be drawn. "
            "It is fetched when the package is built; run `python -m pip install -e .` in the source folder, "
            "or install a ready-made wheel of waldenbench."
        )
        raise LibtoolError(message) from missing


def script_text() -> str:
    """3Dmol.js, minified, as a classic browser script.

    Returns
    -------
    str
        About 0.5 MB. Run in a page, it sets `window.$3Dmol`.

    Raises
    ------
    LibtoolError
        The package was built without the file.
    """
    return _read("3Dmol-min.js").decode("utf-8")


@cache
def script_gzip() -> bytes:
    """`script_text` compressed with gzip, always to the same bytes.

    Returns
    -------
    bytes
        About 160 kB. Carries no time stamp, so that a saved page or a widget
        state does not change from one run to the next.

    Raises
    ------
    LibtoolError
        The package was built without the file.
    """
    return gzip.compress(_read("3Dmol-min.js"), compresslevel=9, mtime=0)


def version() -> str:
    """Version of 3Dmol.js that lies in the package, such as 2.5.5.

    Raises
    ------
    LibtoolError
        The package was built without the file.
    """
    return _read("version.txt").decode("utf-8").strip()


def licence_text() -> str:
    """Licences of 3Dmol.js and of the packages bundled in its script.

    Raises
    ------
    LibtoolError
        The package was built without the file.
    """
    return _read("LICENSE.txt").decode("utf-8")
