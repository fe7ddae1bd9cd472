"""Snapshot + results → tables as data. The only place that chooses columns, words and rounding for readers.

One file a table: ``status`` and ``matrix`` (a row a requirement), ``points`` (a row a required point), ``evidence`` (a
row a recorded quantity), ``findings``, ``about`` (what the report was made from), ``trace`` and ``card`` (one
requirement, up to the system and down to the cell). ``figures`` rounds; ``origins`` walks from a record to its cell.
"""
