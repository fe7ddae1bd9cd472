"""Rules about the project's own settings."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.model.decision import Disposition
from specflow.model.finding import Severity
from specflow.rules.base import Found
from specflow.rules.facts import Facts

OFF = "off"


def unknown_rule_named(facts: Facts) -> Iterator[Found]:
    """A policy or a disposition names a rule or a severity that does not exist.

    Why: it does nothing, and whoever wrote it believes that it does.
    Fails: the policy sets "failling" to warning, or "failing" to "fatal".
    Passes: it names a rule of the catalogue and one of info, warning, error, off.
    Do: correct the name; "specflow rules" lists them all.
    """
    project = facts.snapshot.project
    tables = {"": project.policy.severities, **project.policy.gates}
    for gate, severities in tables.items():
        at = f" at {gate}" if gate else ""
        for rule, severity in severities.items():
            if code_key(rule) not in facts.codes:
                yield Found(project.id, f"the policy sets the severity of {rule!r}{at}, which is no rule")
            elif severity not in {*Severity, OFF}:
                yield Found(project.id, f"the policy sets {rule} to {severity!r}{at}, which is no severity")
    for disposition in facts.snapshot.all(Disposition):
        if code_key(disposition.rule) not in facts.codes:
            message = f"disposes of {disposition.rule!r}, which is no rule"
            yield Found(disposition.id, message, origin=disposition.origin, kind="disposition")
