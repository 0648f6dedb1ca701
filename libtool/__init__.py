"""Triage of parallel SN2 alkylation plates.

Rooms, left to right; each knows only those to its left: `errors` and
`records`; `reference` (literature tables); `assets` (browser files); `blocks`
(reading lists); `reaction` (sites and products); `rate` and `approach`
(how fast, and what is in the way); `triage` (flags, hazards, decisions);
`plate`; `export`; `views` (the notebook screens).
"""

__version__ = "0.1.0"
