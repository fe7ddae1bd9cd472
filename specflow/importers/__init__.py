"""From files to drafts: everything that reads what people bring and gives it meaning.

What may live here: ``readers/`` (bytes to grids, no meaning), one module a step from grid to draft (finding tables,
recognising columns, mappings, sheets of documents). Importers return documents, tables and findings as data, never
stop at the first bad cell, and never write to the store.
"""
