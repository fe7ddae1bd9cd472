"""The one label of a row, and close-out with its reason. The first label that applies, in one order, is shown."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import lru_cache

from specflow.model.verdict import CloseOut, Compliance, Label, Verdict
from specflow.verification.compliance import StatusFacts, compliance


def waived(facts: StatusFacts) -> bool:
    """Whether waivers cover all that fails; an open nonconformance keeps the row failing until it is closed."""
    return facts.fails and facts.waiving.all_covered and not facts.nonconformances


def _ready(facts: StatusFacts) -> bool:
    return compliance(facts) is Compliance.COMPLIANT


def _verified(facts: StatusFacts) -> bool:
    return _ready(facts) and facts.approved and not (facts.nonconformances or facts.open_children)


#: When each label applies. The order is that of ``Label``: the first that applies is shown.
_APPLIES: dict[Label, Callable[[StatusFacts], bool]] = {
    Label.NOT_APPLICABLE: lambda facts: not facts.applicable,
    Label.WAIVER_EXCEEDED: lambda facts: facts.fails and bool(facts.waiving.exceeded),
    Label.FAILING: lambda facts: compliance(facts) is Compliance.NON_COMPLIANT and not waived(facts),
    Label.PARTIALLY_COMPLIANT: lambda facts: (
        compliance(facts) is Compliance.PARTIALLY_COMPLIANT and not waived(facts)
    ),
    Label.CONFLICTING: lambda facts: facts.conflicting,
    Label.REVERIFY: lambda facts: facts.stale,
    Label.TBD: lambda facts: facts.to_be_defined,
    Label.UNALLOCATED: lambda facts: facts.unallocated,
    Label.NOT_PLANNED: lambda facts: not facts.counted and not facts.planned and not facts.in_progress,
    Label.PLANNED: lambda facts: not facts.counted and facts.planned,
    Label.UNDECIDABLE: lambda facts: Verdict.UNDECIDABLE in facts.verdicts,
    Label.INSUFFICIENT: lambda facts: Verdict.INSUFFICIENT in facts.verdicts,
    Label.PARTIALLY_VERIFIED: lambda facts: Verdict.NONE in facts.verdicts,
    Label.INCONCLUSIVE: lambda facts: Verdict.INCONCLUSIVE in facts.verdicts,
    Label.MARGINAL: lambda facts: facts.marginal,
    Label.TBR: lambda facts: facts.to_be_reviewed,
    Label.READY: lambda facts: _ready(facts) and not _verified(facts),
    Label.CLOSED_WAIVED: waived,
    Label.CLOSED_VERIFIED: _verified,
}


_ORDER = [(one, _APPLIES[one]) for one in Label]
_AFTER_MARGINAL = _ORDER[list(Label).index(Label.MARGINAL) + 1 :]


@lru_cache(maxsize=1024)
def label_and_close_out(facts: StatusFacts) -> tuple[Label, CloseOut, str]:
    """Return the label, and open or closed with the reason; a marginal result is shown and keeps no row open.

    Remembered by the facts: of most requirements they are the same few.
    """
    first = _first(facts, _ORDER)
    reason = first if first is not Label.MARGINAL else _first(facts, _AFTER_MARGINAL)
    return (first, *_close_out(facts, reason))


def _first(facts: StatusFacts, order: Sequence[tuple[Label, Callable[[StatusFacts], bool]]]) -> Label:
    return next((one for one, applies in order if applies(facts)), Label.INCONCLUSIVE)


def _close_out(facts: StatusFacts, reason: Label) -> tuple[CloseOut, str]:
    if reason is Label.NOT_APPLICABLE:
        return CloseOut.CLOSED, f"not applicable: {facts.not_applicable_reason}"
    if reason is Label.CLOSED_WAIVED:
        return CloseOut.CLOSED, f"waived by {', '.join(facts.waiving.covering)}"
    if reason is Label.CLOSED_VERIFIED:
        return CloseOut.CLOSED, "verified"
    return CloseOut.OPEN, _open_reason(facts, reason)


def _open_reason(facts: StatusFacts, reason: Label) -> str:
    parts = [reason.value]
    if reason is Label.WAIVER_EXCEEDED:
        parts = list(facts.waiving.exceeded)
    if reason is Label.READY and facts.not_representative:
        parts.append(f"proved on {', '.join(facts.not_representative)}")
    if facts.nonconformances:
        parts.append(f"{', '.join(facts.nonconformances)} open")
        if facts.fails and facts.waiving.all_covered:
            parts.append(f"then waived by {', '.join(facts.waiving.covering)}")
    if facts.open_children:
        parts.append(f"below it open: {', '.join(facts.open_children)}")
    if facts.fails and facts.waiving.requested:
        parts.append(f"waiver requested ({', '.join(facts.waiving.requested)})")
    return "; ".join(parts)
