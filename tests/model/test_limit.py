"""Limit documents: frozen, strict, and the same after JSON."""

from __future__ import annotations

import pytest
from pydantic import TypeAdapter, ValidationError

from specflow.model.expression import Call, Expression, Name, Negative, Number, Operation
from specflow.model.limit import Between, Bound, Limit, LimitNode, LimitState, Side, Tolerance

CEILING = Bound(
    side=Side.UPPER,
    value=Call(
        function="min",
        arguments=(
            Negative(operand=Number(text="5.0")),
            Operation(sign="-", left=Name(name="P_rated", unit="dBm"), right=Number(text="35")),
        ),
    ),
    unit="dBm",
)


def test_limit_is_the_same_after_json() -> None:
    limit = Limit(text="typed", tree=CEILING, unit="dBm", state=LimitState.TBR, readings=("said",))
    assert Limit.model_validate_json(limit.model_dump_json()) == limit


def test_numbers_keep_their_digits_in_json() -> None:
    assert '"text":"5.0"' in CEILING.model_dump_json()


def test_kind_decides_which_node_is_read() -> None:
    adapter: TypeAdapter[LimitNode] = TypeAdapter(LimitNode)
    number = {"kind": "number", "text": "3"}
    read = adapter.validate_python({"kind": "between", "lower": number, "upper": number, "unit": "V"})
    assert isinstance(read, Between)
    with pytest.raises(ValidationError):
        adapter.validate_python({"kind": "unheard_of"})


@pytest.mark.parametrize("text", ["", "three", "1,5", "nan", "inf"])
def test_number_is_a_finite_number(text: str) -> None:
    with pytest.raises(ValidationError):
        Number(text=text)


def test_function_counts_its_arguments() -> None:
    with pytest.raises(ValidationError, match="argument"):
        Call(function="min", arguments=(Number(text="1"),))
    adapter: TypeAdapter[Expression] = TypeAdapter(Expression)
    with pytest.raises(ValidationError):
        adapter.validate_python({"kind": "call", "function": "system", "arguments": []})


def test_limits_are_frozen() -> None:
    tolerance = Tolerance(plus=Number(text="1"), minus=Number(text="1"), unit="dB", tolerance_unit="dB")
    with pytest.raises(ValidationError):
        tolerance.unit = "dBm"  # type: ignore[misc]
