"""From factors to a unit: which kind the product is, and its canonical symbol."""

from __future__ import annotations

from dataclasses import dataclass, replace
from decimal import Decimal, localcontext
from fractions import Fraction

from specflow.errors import UnitError
from specflow.units import dimension, foreign, names
from specflow.units.density import IN_BANDWIDTH, density_of
from specflow.units.factors import Factor, factorise
from specflow.units.kinds import Kind
from specflow.units.names import Name
from specflow.units.table import AMBIGUOUS, ANTENNA_FACTOR, AREA, MERIT, LogRow
from specflow.units.unit import Unit

_KIND_OF_DIMENSION = {
    "ratio": Kind.RATIO,
    "power": Kind.LEVEL,
    "power flux": Kind.POWER_FLUX,
    "electric field": Kind.FIELD_LEVEL,
    "magnetic field": Kind.FIELD_LEVEL,
    "dB per length": Kind.DB_PER_LENGTH,
}
_LARGEST_EXPONENT = 12
_LONGEST_NUMBER = 200


# dB(x) for the few x that are not simply a level: what stands in the brackets, and its exponent.
_REFERRED = {
    ("K", Fraction(-1)): MERIT,
    ("m", Fraction(-1)): ANTENNA_FACTOR,
    ("m", Fraction(2)): AREA,
}


@dataclass(frozen=True, slots=True)
class _Part:
    """A factor with its name looked up; ``written`` is its canonical spelling without the exponent."""

    written: str
    exponent: Fraction
    scale: Fraction
    exponents: dimension.Exponents
    is_decibel: bool = False

    @property
    def dimension(self) -> str:
        return dimension.name(self.exponents)


def composed(factors: list[Factor]) -> Unit:
    """The unit of a product: a level in dB over something, or a product of linear units."""
    row = names.log_row(factors[0].name)
    if row is None and factors[0].name.casefold().startswith("db"):
        raise _unknown(factors[0].name)
    if row is not None and factors[0] != Factor(factors[0].name):
        raise UnitError(
            f"{row.symbol} with a number or an exponent is not a unit", hint="the number belongs to the value"
        )
    if len(factors) == 1 and factors[0] == Factor(factors[0].name):
        return logarithmic(row) if row else linear(_named(factors[0].name))
    if row is not None and row.symbol != "dB":
        return _over(row, [_part(factor) for factor in factors[1:]])
    parts = [_part(factor) for factor in factors]
    if row is not None and _is_merit(parts):
        return logarithmic(MERIT)
    return _product(parts)


def whole_word(text: str) -> Unit | None:
    """The unit whose spelling stands in the table as it is, with whatever signs it contains ("-", "dB-Hz", "bit/s")."""
    row = names.log_row(text)
    if row is not None:
        return logarithmic(row)
    name = names.linear_name(text)
    return linear(name) if name is not None else None


def logarithmic(row: LogRow) -> Unit:
    """The unit of one row of the logarithmic table."""
    if not row.reference:
        return Unit(row.symbol, row.kind, "ratio", is_log=True, gauge=row.gauge)
    scale, exponents = _multiplied([_part(factor) for factor in factorise(row.reference)])
    name = row.dimension or dimension.name(exponents)
    return Unit(row.symbol, row.kind, name, float(scale), is_log=True, log_factor=row.log_factor)


def linear(name: Name) -> Unit:
    """The unit of one linear name."""
    kind = _KIND_OF_DIMENSION.get(name.dimension, Kind.PHYSICAL)
    return Unit(name.symbol, kind, name.dimension, float(name.scale), float(name.offset))


def measured(unit: Unit, measure: str) -> Unit:
    """The unit with the measure that was written behind it: V rms, dB p-p."""
    if unit.measure:
        raise UnitError(f"'{unit.symbol}' already says {unit.measure}: it cannot be {measure} too")
    return replace(unit, symbol=f"{unit.symbol} {measure}", measure=measure)


def referred(factors: list[Factor]) -> Unit:
    """The unit written as dB(reference), the notation of ITU-R V.574: dB(W/m²), dB(µV/m), dB(m) for dB(1 mW)."""
    factors = factors[1:] if len(factors) > 1 and factors[0] == Factor("") else factors
    special = _REFERRED.get((factors[0].name, factors[0].exponent)) if len(factors) == 1 else None
    if special is not None:
        return logarithmic(special)
    head, *rest = factors
    if names.log_row(f"dB{head.name}") is None:
        raise UnitError(f"dB cannot be relative to '{head.name}'", hint="a remark is no part of the unit")
    return composed([replace(head, name=f"dB{head.name}"), *rest])


def _over(row: LogRow, parts: list[_Part]) -> Unit:
    """A logarithmic unit over an area, a length, a bandwidth, a temperature."""
    unit = logarithmic(row)
    bandwidths = [part for part in parts if part.dimension == "frequency" and part.exponent == -1]
    others = [part for part in parts if part not in bandwidths]
    if unit.gauge == "i" and not bandwidths and _is_merit([_DECIBEL, *others]):
        return logarithmic(MERIT)
    if others:
        unit = _per_space(unit, others)
    return _in_bandwidth(unit, bandwidths) if bandwidths else unit


def _per_space(unit: Unit, parts: list[_Part]) -> Unit:
    """dBW over m², dBµV over m."""
    scale, exponents = _multiplied(parts)
    over = dimension.name(exponents)
    field = {"voltage": "electric field", "current": "magnetic field"}.get(unit.dimension)
    if unit.kind is Kind.LEVEL and unit.dimension == "power" and over == "m^-2":
        kind, name = Kind.POWER_FLUX, "power flux"
    elif unit.kind is Kind.LEVEL and field and over == "m^-1":
        kind, name = Kind.FIELD_LEVEL, field
    else:
        raise UnitError(
            f"'{_symbol(unit.symbol, parts)}' is not a quantity: {unit.symbol} is not counted per {over}"
        )
    symbol = _symbol(unit.symbol, parts)
    return replace(
        unit, symbol=symbol, kind=kind, dimension=name, scale=_size(Fraction(repr(unit.scale)) * scale)
    )


def _in_bandwidth(unit: Unit, bandwidths: list[_Part]) -> Unit:
    """A level, flux or ratio in its reference bandwidth."""
    if len(bandwidths) > 1:
        raise UnitError(f"'{_symbol(unit.symbol, bandwidths)}' has two bandwidths")
    return density_of(unit, _size(bandwidths[0].scale))


def _product(parts: list[_Part]) -> Unit:
    """A product of linear units; power over a bandwidth stays a density and does not become an energy."""
    bandwidths = [part for part in parts if part.dimension == "frequency" and part.exponent == -1]
    others = [part for part in parts if part not in bandwidths]
    if others and bandwidths:
        rest = _plain_product(others)
        if rest.kind in IN_BANDWIDTH and rest.kind is not Kind.RATIO:
            return _in_bandwidth(rest, bandwidths)
    if _is_decibel_per_hertz(parts):
        raise UnitError("unit 'dB/Hz' has more than one meaning", hint=AMBIGUOUS["dB/Hz"])
    return _plain_product(parts)


def _plain_product(parts: list[_Part]) -> Unit:
    scale, exponents = _multiplied(parts)
    name = dimension.name(exponents)
    symbol = _symbol("", parts)
    whole = whole_word(symbol)
    if whole is not None:  # everything else cancelled, as in 1·dB
        return whole
    if abs(exponents.get("dB", 1)) != 1:
        raise UnitError(f"'{symbol}' is not a quantity: a decibel has no power")
    if any(part.exponent > 0 and part.written[0].isdigit() and part.written != "1" for part in parts):
        raise UnitError(
            f"'{symbol}' is a value with a unit, not a unit", hint="the number belongs to the value"
        )
    kind = Kind.DB_SLOPE if "dB" in exponents else Kind.PHYSICAL
    return Unit(symbol, _KIND_OF_DIMENSION.get(name, kind), name, _size(scale))


def _is_decibel_per_hertz(parts: list[_Part]) -> bool:
    return len(parts) == 2 and parts[0].is_decibel and parts[1].written == "Hz"


def _is_merit(parts: list[_Part]) -> bool:
    return len(parts) == 2 and parts[0].is_decibel and parts[1].written == "K" and parts[1].exponent == -1


_DECIBEL = _Part("dB", Fraction(1), Fraction(1), {"dB": Fraction(1)}, is_decibel=True)


def _part(factor: Factor) -> _Part:
    if not factor.coefficient or abs(factor.exponent) > _LARGEST_EXPONENT:
        raise UnitError(
            f"'{_number(factor.coefficient)} {factor.name}^{factor.exponent}' is no part of a unit"
        )
    if factor.name.casefold() == "db" and factor.coefficient == 1:
        return replace(_DECIBEL, exponent=factor.exponent)
    if not factor.name:
        if factor.coefficient != 1:
            raise UnitError(f"the number {_number(factor.coefficient)} in a unit belongs to no part of it")
        return _Part(_number(factor.coefficient), factor.exponent, factor.coefficient, {})
    name = _named(factor.name)
    written = name.symbol if factor.coefficient == 1 else f"{_number(factor.coefficient)} {name.symbol}"
    return _Part(written, factor.exponent, name.scale * factor.coefficient, dict(name.exponents))


def _named(text: str) -> Name:
    name = names.linear_name(text) or foreign.linear_name(text)
    if name is None:
        raise _unknown(text)
    return name


def _unknown(text: str) -> UnitError:
    close = names.nearest(text)
    return UnitError(f"unit '{text}' is not known", hint=f"nearest: {', '.join(close)}" if close else "")


def _multiplied(parts: list[_Part]) -> tuple[Fraction, dimension.Exponents]:
    scale: Fraction = Fraction(1)
    exponents: dimension.Exponents = {}
    for part in parts:
        scale *= _power(part.scale, part.exponent)
        exponents = dimension.multiply(exponents, part.exponents, part.exponent)
    return scale, exponents


def _power(base: Fraction, exponent: Fraction) -> Fraction:
    """Exact for whole exponents; a root is the nearest float."""
    return base**exponent.numerator if exponent.denominator == 1 else Fraction(float(base) ** float(exponent))


def _size(scale: Fraction) -> float:
    """The scale as a float; refuses what a float cannot hold."""
    try:
        size = float(scale)
    except OverflowError:
        size = 0.0
    if not size:
        raise UnitError("a unit of this size cannot be counted in")
    return size


def _number(value: Fraction) -> str:
    """The number as it was written, exactly: it came from a decimal, so it has a finite one."""
    with localcontext(prec=2 * _LONGEST_NUMBER):
        exact = Decimal(value.numerator) / Decimal(value.denominator)
        return (
            f"{exact:f}"
            if 1e-4 <= value < 1e6
            else f"{exact.normalize():E}".replace("E+", "e").replace("E", "e")
        )


def _symbol(head: str, parts: list[_Part]) -> str:
    """The canonical spelling: what is above the line joined by ·, each factor below behind its own solidus."""
    merged: dict[str, Fraction] = {}
    for part in parts:
        merged[part.written] = merged.get(part.written, Fraction(0)) + part.exponent
    merged.pop("1", None)
    above = [_raised(written, exponent) for written, exponent in merged.items() if exponent > 0]
    below = [_raised(written, -exponent) for written, exponent in merged.items() if exponent < 0]
    return "/".join([head or "·".join(above) or "1", *below])


def _raised(written: str, exponent: Fraction) -> str:
    if exponent == Fraction(1, 2):
        return f"√{written}"
    signs = {Fraction(1): "", Fraction(2): "²", Fraction(3): "³"}
    written = f"({written})" if exponent != 1 and not written.isalpha() else written
    return written + signs.get(exponent, f"^({exponent})")
