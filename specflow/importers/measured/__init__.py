"""Measurement tables: from the grid of a sheet to columns of evidence, in steps that each have one module.

- where: ``tables`` (header row, units row, data rows), ``cells`` (their columns, read once), ``facts`` (key–value
  rows above a table), ``layout`` (the key under which a layout is known again), ``located`` (a table with its mapping
  and what is said above it)
- what: ``header_text`` (a header taken apart) with ``scale_text`` (its factor), ``roles``, ``quantity_text``,
  ``unit_source`` and ``cell_units`` (what its words, its cells and unit columns say), ``meaning`` (the order of
  decisions) with ``column``, ``value_column``, ``condition_column``, ``constants``, ``pairing`` and ``scaling``
- said: ``stated`` (by the person, the mapping or the file, for all rows) with ``names``, ``day``, ``instrument`` (exports
  of analysers) and ``formats``, ``mapping`` (TOML), ``proposal``, ``context`` (what the project knows)
- read: ``selection`` (which rows), ``readings`` (numbers and intervals), ``placeholders``, ``linear_values``, ``words``,
  ``conditions``, ``directions``, ``uncertainty``, ``values``, ``pivot`` (one quantity at several conditions),
  ``rejects``, ``subject`` (block and items)
- made of it: ``row_kinds`` (lines and noise, bandwidths, row by row) with ``spectrum_words``, ``corrections`` with
  ``correction_doubts`` and ``correction_units``, ``peak_list`` with ``scan_text``
- doubted: ``slips`` and ``slip_findings`` (slipped decimals), ``zero_hertz``; kept beside: ``source_says`` (limits and
  verdicts of the source)
- given back: ``evidence`` brings all together (``work`` holds it meanwhile), ``document``, ``result``

Nothing here writes, and nothing stops at the first bad cell: what cannot be read is a rejected cell (``LeftOut``) or a
question, and a table with a question gives no evidence.
"""
