"""Measurement tables: from the grid of a sheet to columns of evidence, in steps that each have one module.

- where: ``finding`` (all tables of a sheet) by ``tables`` (header row, units row, data rows), ``beside`` (tables beside
  each other), ``sideways`` (on their side), ``corner`` (numbers as headers), ``blocks`` (numbers without headers);
  ``placed`` (where a mapping says, with ``area``); ``cells`` (their columns, read once), ``facts`` (key–value rows),
  ``titles``, ``place_facts`` (conditions from a cell)
- whose: ``located`` (a table with its mapping and what is said above it), ``layout`` (the key under which a layout is
  known again), ``settled`` (which mapping holds); ``parts`` part a table until each part reads like a plain one:
  ``long_form``, ``groups``, ``at_headers`` and ``item_headers`` (headers that state a condition, or name items),
  ``axis``; ``over_columns`` (words over a grid that its mapping was not made for); ``repeats`` (the same records twice)
- what: ``header_text`` (a header taken apart) with ``scale_text`` (its factor), ``roles``, ``quantity_text``,
  ``unit_source`` and ``cell_units`` (what its words, its cells and unit columns say), ``meaning`` (the order of
  decisions) with ``column``, ``value_column``, ``condition_column``, ``constants``, ``pairing`` and ``scaling``
- said: ``stated`` (by the person, the mapping or the file, for all rows), taken by ``stating`` with ``names``,
  ``day``, ``instrument`` (exports of analysers) and ``formats``; ``mapping`` (TOML) with ``mapping_parts``,
  ``proposal``, ``context`` (what the project knows), ``items`` (words that name specimens)
- read: ``selection`` (which rows), ``readings`` (numbers and intervals), ``placeholders``, ``linear_values``,
  ``words``, ``conditions``, ``directions``, ``uncertainty``, ``values``, ``pivot`` (one quantity at several
  conditions), ``carried`` (cells that hold for rows below), ``rejects``, ``subject`` (block and items),
  ``item_column``
- made of it: ``row_kinds`` (lines and noise, bandwidths, row by row) with ``spectrum_words``, ``corrections`` with
  ``correction_doubts`` and ``correction_units``, ``peak_list`` with ``scan_text``
- doubted: ``slips`` and ``slip_findings`` (slipped decimals), ``zero_hertz``; kept beside: ``source_says`` (limits and
  verdicts of the source)
- given back: ``evidence`` brings all together (``work`` holds it meanwhile), ``document``, ``result``

Nothing here writes, and nothing stops at the first bad cell: what cannot be read is a rejected cell (``LeftOut``) or a
question, and a table with a question gives no evidence.
"""
