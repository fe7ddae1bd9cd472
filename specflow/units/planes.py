"""What is missing between two planes of one quantity. A level does not change its plane by changing its unit."""

from __future__ import annotations

_MISSING = {
    frozenset({"EIRP", "TRP"}): "the directivity, or the pattern over the sphere, is missing",
    frozenset({"EIS", "TIS"}): "the directivity, or the pattern over the sphere, is missing",
    frozenset({"EIRP", "ERP"}): "one signal has an EIRP 2.15 dB above its ERP: say that it is restated",
    frozenset({"EIRP", "CONDUCTED"}): "the antenna gain, and the loss up to it, are missing",
    frozenset({"ERP", "CONDUCTED"}): "the antenna gain, and the loss up to it, are missing",
    frozenset({"TRP", "CONDUCTED"}): "the efficiency of the antenna, and the loss up to it, are missing",
    frozenset({"EIS", "CONDUCTED"}): "the antenna gain, and the loss behind it, are missing",
    frozenset({"TIS", "CONDUCTED"}): "the efficiency of the antenna, and the loss behind it, are missing",
}


def missing_between_planes(source: str, target: str) -> str:
    """What must be declared to take a value from one plane to the other; empty when they are the same.

    The conventions EIRP, ERP, TRP, EIS, TIS and "conducted" have their own answers; any other pair needs a path.
    """
    left, right = (plane.strip().upper().replace(".", "") for plane in (source, target))
    if left == right:
        return ""
    path = f"a path from {source} to {target}, with its gain or loss and its uncertainty, must be declared"
    return _MISSING.get(frozenset({left, right}), path)
