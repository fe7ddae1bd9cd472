"""What a person asks of a law, resolved: which columns it reads, and of what quantity its result is."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from specflow.derive import LAW_BY_NAME, LAWS, Law, Request, Role, complete_settings
from specflow.errors import DocumentError
from specflow.limits.tree import side_of
from specflow.model.base import code_key
from specflow.model.evidence import EvidenceColumns, EvidenceTable, Supersession, ValueColumn, Withdrawal
from specflow.model.limit import Side
from specflow.model.parameter import Better, QuantityIdentity
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.workflows.subjects import not_found


@dataclass(frozen=True, slots=True)
class DeriveOptions:
    """What the person says: a law, the tables, what is read of them as what, the range, the settings, what it gives.

    ``values``: "NAME" or "ROLE=NAME", a name may be a header, a value column or a parameter, with "where ..." behind
    it; in "EV-3:NAME" it names its table. ``requirement`` takes the quantity from a requirement instead of ``gives``;
    ``quantity`` gives it whole.
    """

    law: str
    tables: Sequence[str]
    values: Sequence[str] = ()
    over: Sequence[str] = ()
    where: Sequence[str] = ()
    settings: Mapping[str, str] = field(default_factory=dict)
    gives: str = ""
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    requirement: str = ""
    quantity: QuantityIdentity | None = None


def law_named(name: str) -> Law:
    """Return a law by its name; DocumentError with what is near."""
    law = LAW_BY_NAME.get(name.strip().casefold().replace("-", " ").replace("_", " "))
    if law is None:
        raise not_found("law", name, [one.name for one in LAWS], listing="specflow derive lists the laws")
    return law


Arrays = Mapping[str, EvidenceColumns]


def request_of(
    snapshot: Snapshot,
    dictionary: Dictionary,
    options: DeriveOptions,
    tables: Sequence[EvidenceTable] = (),
    arrays: Arrays | None = None,
) -> tuple[Request, QuantityIdentity]:
    """Return what the options mean: the request, and the quantity of its result.

    ``tables`` with their ``arrays`` are read instead of those that the options name (they are not stored yet).
    """
    law = law_named(options.law)
    tables = tables or [_table_named(snapshot, name) for name in options.tables]
    if not tables:
        hint = "say --from EV-3; specflow export --table evidence lists them"
        raise DocumentError("no table is named", hint=hint)
    roles = _roles(law, options, tables, arrays or snapshot.load_columns([table.id for table in tables]))
    _check_alike(law, roles)
    settings = complete_settings(law, options.settings)
    quantity = options.quantity or _quantity(snapshot, dictionary, law, options, settings, roles)
    parameter = dictionary.get(quantity.parameter)
    if parameter is None:
        raise DocumentError(f"{quantity.parameter} is no known parameter", where=options.requirement)
    return Request(law, roles, settings, parameter, tuple(options.over), tuple(options.where)), quantity


def _check_alike(law: Law, roles: Sequence[Role]) -> None:
    """Refuse tables that may not be put together, and lists of peaks where what lies between readings matters."""
    base = roles[0].table
    for role in roles:
        table = role.table
        if table.peaks is not None and law.over != "each":
            raise DocumentError(
                f"{table.id} is a list of peaks; what lies between them was not listed",
                where=f"law {law.name}",
                hint="peaks are judged as they are; derive from a trace",
            )
        for part in ("block", "method", "stage"):
            mine, other = getattr(base, part), getattr(table, part)
            if code_key(str(mine)) != code_key(str(other)):
                raise DocumentError(
                    f"{base.id} and {table.id} differ in {part}: {mine} and {other}",
                    where=f"law {law.name}",
                    hint="derive from tables of one block, taken in one way",
                )


def _roles(
    law: Law, options: DeriveOptions, tables: Sequence[EvidenceTable], arrays: Arrays
) -> tuple[Role, ...]:
    if law.whole_table:
        return _every_column(law, tables, arrays)
    said = dict(_said_role(law, place, text) for place, text in enumerate(options.values))
    by_key = {code_key(table.id): table for table in tables}
    roles = []
    for name in law.roles:
        name_part, _, where = said.pop(name, "").partition(" where ")
        code, colon, column = name_part.partition(":")
        own = by_key.get(code_key(code)) if colon else None
        wanted = name_part.strip() if own is None else column.strip()
        table, value = _column_named(tables if own is None else [own], wanted, law, name)
        clauses = tuple(filter(None, (part.strip() for part in where.split(" and "))))
        roles.append(Role(name, table, arrays[table.id], value.name, clauses))
    return tuple(roles)


def _every_column(law: Law, tables: Sequence[EvidenceTable], arrays: Arrays) -> tuple[Role, ...]:
    if len(tables) != 1:
        raise DocumentError(f"the law {law.name} reads one whole table", hint="say --from once")
    table = tables[0]
    return tuple(Role(one.name, table, arrays[table.id], one.name) for one in table.values)


def _said_role(law: Law, place: int, text: str) -> tuple[str, str]:
    role, sign, name = text.partition("=")
    if sign and role.strip() in law.roles:
        return role.strip(), name.strip()
    if place < len(law.roles):
        return law.roles[place], text.strip()
    raise DocumentError(
        f"the law {law.name} reads {len(law.roles)} value column{'s' * (len(law.roles) != 1)}: {', '.join(law.roles)}",
        where=f"--value {text!r}",
    )


def _table_named(snapshot: Snapshot, name: str) -> EvidenceTable:
    table = snapshot.find(EvidenceTable, name)
    if table is None:
        known = [one.id for one in snapshot.tables]
        raise not_found("evidence table", name, known, listing="specflow export --table evidence lists them")
    gone = [one.later for one in snapshot.all(Supersession)
            if code_key(one.earlier) == code_key(table.id) and one.rows is None]  # fmt: skip
    if gone:
        raise DocumentError(f"{table.id} was superseded by {gone[-1]}", hint=f"say --from {gone[-1]}")
    if any(
        code_key(one.table) == code_key(table.id) and one.rows is None for one in snapshot.all(Withdrawal)
    ):
        raise DocumentError(f"{table.id} was withdrawn", hint="derive from a table that stands")
    return table


def _column_named(
    tables: Sequence[EvidenceTable], wanted: str, law: Law, role: str
) -> tuple[EvidenceTable, ValueColumn]:
    """Return the one value column that a name means; the only one where nothing was said."""
    key = wanted.casefold()
    everything = [(table, column) for table in tables for column in table.values]
    found = [
        (table, column)
        for table, column in everything
        if not key
        or key in (column.name.casefold(), column.header.casefold(), column.quantity.parameter.casefold())
    ]
    exact = [(table, column) for table, column in found if key and column.name.casefold() == key]
    if len(exact) == 1:
        return exact[0]
    if len(found) == 1:
        return found[0]
    there = ", ".join(f"{table.id}:{column.name}" for table, column in found or everything)
    what = f"no value column is called {wanted!r}" if not found else (
        f"{len(found)} value columns are called {wanted!r}" if wanted else f"it is not said which is the {role}"
    )  # fmt: skip
    raise DocumentError(
        what, where=f"law {law.name}, {role}", hint=f"say --value {role}=NAME; there are: {there}"
    )


def _quantity(
    snapshot: Snapshot,
    dictionary: Dictionary,
    law: Law,
    options: DeriveOptions,
    settings: Mapping[str, str],
    roles: Sequence[Role],
) -> QuantityIdentity:
    """Return the quantity that the result is of: as said, as the requirement has it, or that of the column read."""
    first = roles[0]
    own = next(one.quantity for one in first.table.values if one.name == first.column)
    if options.requirement:
        requirement = snapshot.find(Requirement, options.requirement)
        if requirement is None:
            raise not_found("requirement", options.requirement, [one.id for one in snapshot.requirements])
        quantity = requirement.quantity
        if (
            code_key(quantity.parameter) == code_key(own.parameter)
            and law.statistic
            and not quantity.statistic
        ):
            _refuse_hidden(requirement, dictionary, law, settings)
        return quantity
    key = dictionary.resolve(options.gives).key if options.gives else _usual(law, own.parameter)
    parameter = dictionary.get(key)
    if parameter is None:
        raise DocumentError(f"{key} is no known parameter", hint="say --gives PARAMETER")
    same = code_key(key) == code_key(own.parameter)
    named = law.statistic.format(**settings) if law.statistic else (own.statistic if same else "")
    if not same and named not in parameter.statistics:
        named = ""
    read = [next(one.quantity for one in role.table.values if one.name == role.column) for role in roles]
    planes, polarisations = ({getattr(one, part) for one in read} for part in ("plane", "polarisation"))
    return QuantityIdentity(
        parameter=key,
        plane=options.plane or (own.plane if len(planes) == 1 else ""),
        statistic=options.statistic or named,
        bandwidth_hz=own.bandwidth_hz if same else None,
        polarisation=options.polarisation or (own.polarisation if len(polarisations) == 1 else ""),
    )


def _usual(law: Law, own: str) -> str:
    """Return the parameter of a result about which nothing was said."""
    if law.keeps_parameter:
        return own
    if len(law.gives) == 1:
        return law.gives[0]
    usual = f"; usual: {', '.join(law.gives)}" if law.gives else ""
    raise DocumentError(
        f"it is not said of what parameter the result of the law {law.name} is",
        hint=f"say --gives PARAMETER, or --for REQUIREMENT{usual}",
    )


def _refuse_hidden(
    requirement: Requirement, dictionary: Dictionary, law: Law, settings: Mapping[str, str]
) -> None:
    """Refuse to call a mean, or the wrong end, a reading of a requirement that names no statistic."""
    one_side = side_of(requirement.limit.tree)
    sides = {Side.LOWER, Side.UPPER} if one_side is None else {one_side}
    parameter = dictionary.get(requirement.quantity.parameter)
    better = parameter.better if parameter is not None else Better.NEITHER
    said = settings.get("side", "")
    if said == "as the parameter":
        said = {Better.HIGHER: "lowest", Better.LOWER: "highest"}.get(better, "both")
    enough = {"lowest": {Side.LOWER}, "highest": {Side.UPPER}, "both": {Side.LOWER, Side.UPPER}}.get(
        said, set()
    )
    if law.name == "worst" and sides <= enough:
        return
    if law.name == "worst":
        raise DocumentError(
            f"{requirement.id} ({requirement.limit.text}) is not shown by the {said} reading alone",
            hint="say --set side=both; or leave it to the raw readings, which are judged point by point",
        )
    raise DocumentError(
        f"{requirement.id} names no statistic, so it holds for every reading; the {law.name} does not show that",
        hint="name the statistic in the requirement, or derive the worst",
    )
