"""Measurement tables: from the grid of a sheet to columns of evidence, in steps that each have one module.

- ``tables``      where tables are on a sheet: header row, units row, data rows; ``cells`` their columns, read once
- ``facts``       the key–value rows above a table; ``stated`` what is said for all of its rows, and by whom
- ``header_text`` a header taken apart; ``roles`` what its words say; ``meaning`` what each column is, with the reason
- ``mapping``     how a person settled a layout (TOML), ``proposal`` the mapping as we would write it, ``layout`` the key
- ``readings``    cells to numbers and intervals; ``conditions``, ``words`` the other columns; ``uncertainty`` where u is from
- ``pivot``       columns that are one quantity at several conditions, stacked
- ``result``      what comes back: tables, questions, rejected cells

Nothing here writes, and nothing stops at the first bad cell: what cannot be read is a rejected cell (``LeftOut``) or a
question, and a table with a question gives no evidence.
"""
