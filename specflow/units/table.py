"""The table of units, as data. A unit met in practice is added here, nowhere else.

Radio units come from this table first: a general units library reads dBi as decibiot and pct as picocarat, and
refuses dBm/Hz. Scales are exact decimals or fractions in SI units. Prefixes are listed per unit, because the rest (a
"Gs", an "MV") is more often a slip of the shift key than a measurement.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction

from specflow.units.kinds import Kind

PREFIXES = {
    "f": Fraction(1, 10**15),
    "p": Fraction(1, 10**12),
    "n": Fraction(1, 10**9),
    "µ": Fraction(1, 10**6),
    "m": Fraction(1, 10**3),
    "c": Fraction(1, 100),
    "d": Fraction(1, 10),
    "h": Fraction(100),
    "k": Fraction(10**3),
    "M": Fraction(10**6),
    "G": Fraction(10**9),
    "T": Fraction(10**12),
}

_DEGREE = Fraction(math.pi / 180)


@dataclass(frozen=True, slots=True)
class LinearRow:
    """One linear unit: ``prefixed`` spellings take the prefixes, ``spellings`` are whole words that do not."""

    symbol: str
    dimension: str
    scale: Fraction = Fraction(1)
    offset: Fraction = Fraction(0)
    prefixes: str = ""
    prefixed: tuple[str, ...] = ()
    spellings: tuple[str, ...] = ()


LINEAR = (
    LinearRow("Hz", "s^-1", prefixes="µmkMGT", spellings=("hz", "HZ", "hertz", "Hertz", "c/s")),
    LinearRow("s", "s", prefixes="fpnµm", prefixed=("sec",), spellings=("second", "seconds", "secs")),
    LinearRow("min", "s", Fraction(60), spellings=("minute", "minutes")),
    LinearRow("h", "s", Fraction(3600), spellings=("hr", "hrs", "hour", "hours")),
    LinearRow("day", "s", Fraction(86400), spellings=("days",)),
    LinearRow("year", "s", Fraction(31557600), spellings=("yr", "years")),  # the Julian year of 365.25 days
    LinearRow(
        "m", "m", prefixes="pnµmcdk", spellings=("metre", "meter", "metres", "meters", "Meter", "Metre")
    ),
    LinearRow("in", "m", Fraction("0.0254"), spellings=("inch", "inches")),
    LinearRow("mil", "m", Fraction("0.0000254"), spellings=("mils", "thou")),
    LinearRow("ft", "m", Fraction("0.3048"), spellings=("foot", "feet")),
    LinearRow("mile", "m", Fraction("1609.344"), spellings=("miles",)),
    LinearRow("nmi", "m", Fraction(1852)),
    LinearRow("g", "kg", Fraction(1, 1000), prefixes="µmk", spellings=("gram", "grams")),
    LinearRow("lb", "kg", Fraction("0.45359237"), spellings=("lbs",)),
    LinearRow("A", "A", prefixes="fpnµmk", spellings=("amp", "amps", "ampere", "amperes", "Amp", "Amps")),
    LinearRow("V", "kg m^2 s^-3 A^-1", prefixes="fpnµmk", spellings=("volt", "volts", "Volt", "Volts")),
    LinearRow("W", "kg m^2 s^-3", prefixes="fpnµmkMG", spellings=("watt", "watts", "Watt", "Watts")),
    LinearRow("Ω", "kg m^2 s^-3 A^-2", prefixes="µmkMG", prefixed=("ohm", "Ohm"), spellings=("ohms", "Ohms")),
    LinearRow("S", "kg^-1 m^-2 s^3 A^2", prefixes="nµm", spellings=("siemens",)),
    LinearRow("F", "kg^-1 m^-2 s^4 A^2", prefixes="fpnµm", spellings=("farad",)),
    LinearRow("H", "kg m^2 s^-2 A^-2", prefixes="pnµm", spellings=("henry",)),
    LinearRow("J", "kg m^2 s^-2", prefixes="fpnµmk", spellings=("joule", "joules")),
    LinearRow("Wh", "kg m^2 s^-2", Fraction(3600), prefixes="mk"),
    LinearRow("Ah", "s A", Fraction(3600), prefixes="m"),
    LinearRow("eV", "kg m^2 s^-2", Fraction("1.602176634e-19"), prefixes="mk"),
    LinearRow("N", "kg m s^-2", prefixes="mk", spellings=("newton",)),
    LinearRow("Pa", "kg m^-1 s^-2", prefixes="mhkM", spellings=("pascal",)),
    LinearRow("bar", "kg m^-1 s^-2", Fraction(100000), prefixes="m"),
    LinearRow("T", "kg s^-2 A^-1", prefixes="pnµm", spellings=("tesla",)),
    LinearRow("gauss", "kg s^-2 A^-1", Fraction(1, 10000), prefixes="m", spellings=("Gauss",)),
    LinearRow("K", "K", prefixes="µmk", spellings=("kelvin", "Kelvin", "kelvins", "degK", "°K", "deg K")),
    LinearRow(
        "°C", "K", offset=Fraction("273.15"), spellings=("degC", "DegC", "deg_C", "celsius", "Celsius")
    ),
    LinearRow(
        "°F", "K", Fraction(5, 9), Fraction("459.67") * 5 / 9, spellings=("degF", "DegF", "fahrenheit")
    ),
    LinearRow("Δ°F", "K", Fraction(5, 9), spellings=("delta_degF",)),
    LinearRow("rad", "rad", prefixes="µm", spellings=("radian", "radians", "Rad")),
    LinearRow("deg", "rad", _DEGREE, prefixes="m", spellings=("°", "degree", "degrees", "Degrees", "degs")),
    LinearRow("arcmin", "rad", _DEGREE / 60),
    LinearRow("arcsec", "rad", _DEGREE / 3600),
    LinearRow("rpm", "rad s^-1", Fraction(math.pi / 30)),
    LinearRow("bit", "bit", spellings=("bits",)),
    LinearRow("bit/s", "bit s^-1", prefixes="kMGT", prefixed=("bps", "b/s", "bits/s")),
    LinearRow("sym", "symbol", spellings=("symbol", "symbols")),
    LinearRow("sym/s", "symbol s^-1", prefixes="kMG", prefixed=("Bd", "baud", "symb/s", "symbols/s")),
    LinearRow("Sa", "sample", spellings=("sample", "samples")),
    LinearRow("Sa/s", "sample s^-1", prefixes="kMG", prefixed=("sps", "SPS", "S/s", "samples/s")),
    LinearRow("RB", "RB", spellings=("RBs", "PRB", "PRBs", "resource blocks")),
    LinearRow("decade", "decade", spellings=("decades", "dec")),
    LinearRow("octave", "decade", Fraction(math.log10(2)), spellings=("octaves", "oct")),
    LinearRow("%", "", Fraction(1, 100), spellings=("pct", "percent", "Percent", "per cent", "%RH", "% RH")),
    LinearRow("‰", "", Fraction(1, 1000), spellings=("permille",)),
    LinearRow("ppm", "", Fraction(1, 10**6), spellings=("PPM", "parts per million")),
    LinearRow("ppb", "", Fraction(1, 10**9), spellings=("PPB", "parts per billion")),
    LinearRow(
        "1",
        "",
        spellings=(
            "-",
            "—",
            "lin",
            "linear",
            "ratio",
            "number",
            "dimensionless",
            "unitless",
            "none",
            ":1",
            ": 1",
        ),
    ),
)


@dataclass(frozen=True, slots=True)
class LogRow:
    """One logarithmic unit: what stands after "dB", the linear symbol it refers to, and 10·log or 20·log."""

    symbol: str
    kind: Kind
    reference: str = ""  # linear unit whose size 0 dB stands for; "" for a ratio
    log_factor: int | None = None
    gauge: str = ""
    spellings: tuple[str, ...] = ()
    dimension: str = ""  # where the reference alone does not tell what is meant


MERIT = LogRow("dB/K", Kind.MERIT, "1/K", 10, dimension="figure of merit", spellings=("dBi/K",))
ANTENNA_FACTOR = LogRow("dB(1/m)", Kind.PHYSICAL_LOG, "1/m", 20, dimension="antenna factor")
AREA = LogRow("dBsm", Kind.PHYSICAL_LOG, "m^2", 10)


def _levels() -> tuple[LogRow, ...]:
    powers = [LogRow(f"dB{p}W", Kind.LEVEL, f"{p}W", 10) for p in ("", "k", "µ", "n", "p", "f")]
    volts = [LogRow(f"dB{p}V", Kind.LEVEL, f"{p}V", 20) for p in ("", "m", "µ", "n")]
    amperes = [LogRow(f"dB{p}A", Kind.LEVEL, f"{p}A", 20) for p in ("m", "µ", "n", "p")]
    return (LogRow("dBm", Kind.LEVEL, "mW", 10, spellings=("dBmW",)), *powers, *volts, *amperes)


LOGARITHMIC = (
    *_levels(),
    LogRow("dB", Kind.RATIO, spellings=("decibel", "decibels", "dBs")),
    LogRow("dBi", Kind.RATIO, gauge="i", spellings=("dBiso", "dBil")),
    LogRow("dBic", Kind.RATIO, gauge="ic", spellings=("dBiC",)),
    LogRow("dBd", Kind.RATIO, gauge="d"),
    LogRow("dBc", Kind.RATIO, gauge="c"),
    LogRow("dBr", Kind.RATIO, gauge="r"),
    LogRow("dBFS", Kind.RATIO, gauge="FS"),
    LogRow("dBHz", Kind.BANDWIDTH_LOG, "Hz", 10, spellings=("dB-Hz", "dB·Hz", "dB Hz", "dB*Hz")),
    LogRow("dBK", Kind.PHYSICAL_LOG, "K", 10, spellings=("dB-K", "dB·K")),
    AREA,
    ANTENNA_FACTOR,
    MERIT,
)

AMPLITUDES = frozenset({"voltage", "current", "electric field", "magnetic field"})

DIPOLE_OVER_ISOTROPIC_DB = 2.15
"""Gain of a half-wave dipole in dBi, the conventional two decimals; 10·log10(1.64) is 2.148 and the integral 2.151."""

AMBIGUOUS = {
    "dBu": "dBµV (a voltage), dBµV/m (a field) and 0.775 V in audio are all written so: write dBµV or dBµV/m",
    "dBµ": "dBµV (a voltage) and dBµV/m (a field) are both written so: write dBµV or dBµV/m",
    "dBA": "an A-weighted sound level and a level over 1 A are both written so: write dBµA, or A",
    "C": "C alone is the coulomb: write °C for a temperature",
    "c": "c alone says nothing: write °C for a temperature, dBc for a level under the carrier",
    "k": "k alone is a prefix, or a coverage factor: write K for kelvin, 1 for a factor",
    "dB/Hz": "a noise density is dBc/Hz, a gain slope is dB/MHz or dB/GHz: write which is meant",
    "dBm2": "dBsm is a level over one square metre, dBm/m² a power flux: write which is meant",
    "mhz": "mHz and MHz differ by nine decades: write MHz",
    "mw": "mW and MW differ by nine decades: write mW",
}

# fmt: off
TRUSTED_TO_PINT = frozenset((
    "hertz", "second", "meter", "gram", "kelvin", "ampere", "volt", "watt", "ohm", "farad", "henry",
    "siemens", "joule", "newton", "pascal", "tesla", "weber", "candela", "lumen", "lux", "nit", "mole",
    "pound_force_per_square_inch", "kip_per_square_inch", "torr", "standard_atmosphere", "inch_Hg",
    "british_thermal_unit", "calorie", "horsepower", "knot", "mile_per_hour", "kilometer_per_hour",
    "fathom", "furlong", "yard", "micron", "angstrom", "parsec", "ounce", "pound", "slug", "ton",
    "metric_ton", "liter", "gallon", "hectare", "acre", "week", "month", "dyne", "poise", "force_pound",
))
# fmt: on
"""Pint's names of units that we let it read. It knows hundreds more, and among them words that a sheet of radio data
uses for something else: link, chain, point, pole, section, shot, gamma, sigma."""

PLANE_WORDS = ("eirp", "e.i.r.p.", "erp", "e.r.p.", "trp", "eis", "tis", "conducted", "radiated")
"""Planes and conventions that people write behind a unit; they belong to the quantity, never to the unit."""
