"""Days on which something was decided or recorded, as people of the project count them."""

from __future__ import annotations

from datetime import date, datetime


def day_of(timestamp: str) -> date | None:
    """Return the day of an ISO timestamp where the tool runs, as the day of judgement is; None for none or nonsense."""
    try:
        moment = datetime.fromisoformat(timestamp)
    except ValueError:
        return None
    return moment.date() if moment.tzinfo is None else moment.astimezone().date()


def is_after(timestamp: str, day: date) -> bool:
    """Whether something was recorded later than a day; what has no date is not."""
    recorded = day_of(timestamp)
    return recorded is not None and recorded > day
