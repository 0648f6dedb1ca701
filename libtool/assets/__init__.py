"""Browser files that the package brings along, so that no page asks another host.

`threedmol` reads 3Dmol.js from disk; `inline` puts it into a page.
"""
