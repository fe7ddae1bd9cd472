"""Statistics of evidence: decision rules, rounding, tolerance factors, percentiles over the sphere.

Plain functions on float64 arrays with formula and source in the docstring; they know the words of the model
(verdicts, rule names) and no document. scipy is imported where it is needed, so that judging with plain rules never
loads it.
"""
