"""The dictionary of RF parameters and its look-ups.

What lives here: ``dictionary.json`` (the parameters, as data), ``headers.py`` (a header taken apart into words and
unit), ``dictionary.py`` (loading, and finding a parameter by what a sheet calls it) and ``relations.py`` (parameters
that tell each other by a formula). Nothing here judges values.
"""

from specflow.parameters.dictionary import SIDEBAND_PLANES, Candidate, Dictionary, load_dictionary, suits

__all__ = ["SIDEBAND_PLANES", "Candidate", "Dictionary", "load_dictionary", "suits"]
