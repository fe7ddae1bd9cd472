"""The vocabulary: one frozen document a noun, and nothing that computes, loads or draws.

Glossary (design words; see each module):

- ``parameter``: a named RF quantity; *quantity identity* = parameter + plane + statistic + reference bandwidth +
  polarisation (``parameter.py``)
- ``block``, ``item``, ``plane``: the product tree, its specimens and its ports (``block.py``)
- ``requirement``, ``activity``, decision rule, provers (``requirement.py``); ``limit`` (``limit.py``,
  ``expression.py``)
- ``conditions set``, ``condition map`` (``conditions.py``); the same as arrays: ``columns.py``
- ``declared value``, uncertainty register (``declared.py``)
- ``evidence table`` and *record*, mapping, supersession, withdrawal, change record (``evidence.py``);
  *derivation*: a table made of others by a law (``derivation.py``)
- ``budget``, ``allocation`` (``budget.py``); decisions of people: waiver, nonconformance, approval (``decision.py``)
- ``verdict`` and the five axes of status (``verdict.py``); ``finding`` (``finding.py``)
- ``change``, ``baseline``, ``report`` (a table as data), ``draft`` (an import before it is accepted)
- ``nouns.py``: the one list of what is stored; ``snapshot.py``: all documents with look-ups, and ``Results``.
"""
