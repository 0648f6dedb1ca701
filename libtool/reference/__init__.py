"""Literature tables: one CSV file per subject, one fact per row, each with its source.

`tables` reads them. What a screen shows of a number, it can also show the
source of: the row says where, `sources.csv` says in which publication.
"""
