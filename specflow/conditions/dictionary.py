"""The dictionary of dimensions, as data: canonical names, spellings met in sheets, and how each is compared.

Names are the trade's; the list is a convenience, not a fence: a set may speak of a dimension that is not here.
Every temperature names its location, and unlike locations never match without a condition map.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Comparison(StrEnum):
    """How actual and required values of a dimension are compared."""

    NUMERIC = "numeric"
    TEXT = "text"
    PERIODIC = "periodic"  # numeric modulo 360 degrees
    DIRECTION = "direction"  # half of a pair that is compared on the sphere; numeric while it stands alone


@dataclass(frozen=True, slots=True)
class KnownDimension:
    """A dimension that the tool knows.

    ``unit`` is a representative unit: what is stated must be convertible to it ("" for pure numbers and
    words). ``phrase`` is how a value is said: ``{}`` is replaced by the value with its unit. ``words`` are
    spellings of one meaning, the first being the canonical one.
    """

    name: str
    title: str
    comparison: Comparison
    unit: str = ""
    phrase: str = ""
    aliases: tuple[str, ...] = ()
    words: tuple[tuple[str, ...], ...] = ()


@dataclass(frozen=True, slots=True)
class DirectionPair:
    """Two dimensions that are one direction: ``polar`` counts from the pole (theta) or from the equator
    (elevation).
    """

    polar: str
    turn: str
    polar_from_equator: bool


DIRECTION_PAIRS = (
    DirectionPair("theta", "phi", False),
    DirectionPair("elevation", "azimuth", True),
    DirectionPair("scan_theta", "scan_phi", False),
    DirectionPair("scan_elevation", "scan_azimuth", True),
)

_N, _T, _P, _D = Comparison.NUMERIC, Comparison.TEXT, Comparison.PERIODIC, Comparison.DIRECTION

_POLARISATIONS = (
    ("H", "horizontal", "pol h", "h-pol"),
    ("V", "vertical", "pol v", "v-pol"),
    ("RHCP", "right-hand circular", "right hand circular", "rhc", "rcp"),
    ("LHCP", "left-hand circular", "left hand circular", "lhc", "lcp"),
    ("theta", "θ", "pol theta"),
    ("phi", "φ", "ϕ", "pol phi"),
)
_CHANNELS = (
    ("low", "B", "bottom", "low channel", "low range"),
    ("mid", "M", "middle", "mid channel", "mid range"),
    ("high", "T", "top", "high channel", "high range"),
)
_ENVIRONMENTS = (
    ("normal", "NTNV", "nominal", "normal conditions", "NC"),
    ("extreme", "extreme conditions", "EC"),
    ("TL/VL", "LTLV", "low temperature, low voltage"),
    ("TL/VH", "LTHV", "low temperature, high voltage"),
    ("TH/VL", "HTLV", "high temperature, low voltage"),
    ("TH/VH", "HTHV", "high temperature, high voltage"),
)

KNOWN_DIMENSIONS: tuple[KnownDimension, ...] = (
    KnownDimension(
        "frequency",
        "frequency",
        _N,
        "Hz",
        "{}",
        (
            "f",
            "freq",
            "rf frequency",
            "carrier frequency",
            "f0",
            "fc",
            "rf freq",
            "test frequency",
            "frequenz",
        ),
    ),
    KnownDimension("if_frequency", "intermediate frequency", _N, "Hz", "IF {}", ("if", "if freq", "f_if")),
    KnownDimension(
        "lo_frequency", "local oscillator frequency", _N, "Hz", "LO {}", ("lo", "lo freq", "f_lo")
    ),
    KnownDimension(
        "offset",
        "frequency offset",
        _N,
        "Hz",
        "offset {}",
        (
            "f offset",
            "f_offset",
            "offset frequency",
            "frequency offset",
            "delta f",
            "df",
            "Δf",
            "carrier offset",
        ),
    ),
    KnownDimension(
        "channel_bandwidth",
        "channel bandwidth",
        _N,
        "Hz",
        "{} channel",
        ("bw", "cbw", "bandwidth", "ch bw", "channel bw", "bw channel"),
    ),
    KnownDimension("subcarrier_spacing", "subcarrier spacing", _N, "Hz", "SCS {}", ("scs",)),
    KnownDimension("symbol_rate", "symbol rate", _N, "Hz", "{} symbol rate", ("baud rate", "rs")),
    KnownDimension(
        "temperature_ambient",
        "ambient temperature",
        _N,
        "°C",
        "{} ambient",
        (
            "umgebungstemperatur",
            "t amb",
            "tamb",
            "ambient",
            "t ambient",
            "ta",
            "ambient temp",
            "ambient temperature",
            "temp ambient",
            "chamber temperature",
            "temp amb",
        ),
    ),
    KnownDimension(
        "temperature_baseplate",
        "baseplate temperature",
        _N,
        "°C",
        "{} baseplate",
        (
            "t base",
            "tbase",
            "baseplate",
            "t baseplate",
            "tbp",
            "baseplate temp",
            "baseplate temperature",
            "base plate temperature",
            "temp baseplate",
        ),
    ),
    KnownDimension(
        "temperature_case",
        "case temperature",
        _N,
        "°C",
        "{} case",
        ("t case", "tcase", "tc", "case temp", "case temperature", "temp case"),
    ),
    KnownDimension(
        "temperature_junction",
        "junction temperature",
        _N,
        "°C",
        "{} junction",
        ("t j", "tj", "t junction", "junction temp", "junction temperature"),
    ),
    KnownDimension(
        "temperature_board",
        "board temperature",
        _N,
        "°C",
        "{} board",
        ("t board", "tboard", "pcb temperature", "board temp", "board temperature"),
    ),
    KnownDimension(
        "supply_voltage",
        "supply voltage",
        _N,
        "V",
        "supply {}",
        (
            "vdd",
            "vcc",
            "vsupply",
            "v supply",
            "supply",
            "supply v",
            "vbat",
            "v_batt",
            "vin",
            "dc supply",
            "vdc",
            "v dc",
            "dc voltage",
            "vd",
            "drain voltage",
            "versorgungsspannung",
        ),
    ),
    KnownDimension("humidity", "relative humidity", _N, "%", "{} RH", ("rh", "relative humidity", "hum")),
    KnownDimension("pressure", "air pressure", _N, "kPa", "{}", ("air pressure", "ambient pressure")),
    KnownDimension(
        "power_level",
        "power level",
        _N,
        "dBm",
        "at {}",
        ("power", "level", "output level", "pout", "p out", "power setting", "power state"),
    ),
    KnownDimension(
        "input_level",
        "input level",
        _N,
        "dBm",
        "input {}",
        ("pin", "p in", "input power", "drive", "drive level"),
    ),
    KnownDimension(
        "blocker_level", "blocker level", _N, "dBm", "blocker {}", ("interferer level", "p int", "p blocker")
    ),
    KnownDimension(
        "blocker_offset",
        "blocker offset",
        _N,
        "Hz",
        "blocker offset {}",
        ("interferer offset", "f int offset"),
    ),
    KnownDimension("load_vswr", "load mismatch", _N, "", "load VSWR {}", ("load mismatch", "vswr load")),
    KnownDimension(
        "load_phase", "phase of the load mismatch", _P, "deg", "load phase {}", ("mismatch phase",)
    ),
    KnownDimension(
        "gain_setting",
        "gain setting",
        _N,
        "dB",
        "gain setting {}",
        ("attenuation", "att", "attenuation setting"),
    ),
    KnownDimension(
        "theta", "polar angle", _D, "deg", "θ {}", ("θ", "theta angle", "th", "theta cut", "cut theta")
    ),
    KnownDimension(
        "phi", "azimuthal angle", _D, "deg", "φ {}", ("φ", "ϕ", "phi angle", "ph", "phi cut", "cut phi")
    ),
    KnownDimension("azimuth", "azimuth", _D, "deg", "az {}", ("az", "azimuth angle")),
    KnownDimension("elevation", "elevation", _D, "deg", "el {}", ("el", "elevation angle")),
    KnownDimension("direction_u", "direction cosine u", _N, "", "u {}", ("u cosine", "sin theta cos phi")),
    KnownDimension("direction_v", "direction cosine v", _N, "", "v {}", ("v cosine", "sin theta sin phi")),
    KnownDimension(
        "cut_angle", "angle within a cut", _P, "deg", "cut angle {}", ("angle in cut", "pattern angle")
    ),
    KnownDimension(
        "cut_plane",
        "plane of a cut",
        _T,
        "",
        "{} cut",
        ("cut", "pattern cut", "principal plane", "cut name"),
        (("E-plane", "E plane", "E"), ("H-plane", "H plane", "H"), ("D-plane", "D plane", "diagonal")),
    ),
    KnownDimension(
        "scan_theta",
        "polar angle of the beam",
        _D,
        "deg",
        "beam θ {}",
        (
            "beam theta",
            "steering theta",
            "scan angle",
            "steering angle",
            "theta scan",
            "theta beam",
            "theta steering",
            "scan theta angle",
            "beam theta angle",
            "steering theta angle",
            "beam scan angle",
            "beam steering angle",
        ),
    ),
    KnownDimension(
        "scan_phi",
        "azimuthal angle of the beam",
        _D,
        "deg",
        "beam φ {}",
        (
            "beam phi",
            "steering phi",
            "phi scan",
            "phi beam",
            "phi steering",
            "scan phi angle",
            "beam phi angle",
            "steering phi angle",
        ),
    ),
    KnownDimension(
        "scan_azimuth",
        "azimuth of the beam",
        _D,
        "deg",
        "beam az {}",
        (
            "beam az",
            "beam azimuth",
            "steering az",
            "steering azimuth",
            "scan az",
            "az scan",
            "az beam",
            "azimuth scan",
        ),
    ),
    KnownDimension(
        "scan_elevation",
        "elevation of the beam",
        _D,
        "deg",
        "beam el {}",
        (
            "beam el",
            "beam elevation",
            "steering el",
            "steering elevation",
            "scan el",
            "el scan",
            "el beam",
            "elevation scan",
        ),
    ),
    KnownDimension(
        "rotation",
        "rotation about the axis",
        _P,
        "deg",
        "rotation {}",
        ("roll", "rotation angle", "polarisation angle"),
    ),
    KnownDimension(
        "polarisation",
        "polarisation",
        _T,
        "",
        "{} polarisation",
        ("pol", "pol.", "polarization", "rx pol", "tx pol"),
        _POLARISATIONS,
    ),
    KnownDimension(
        "channel",
        "channel",
        _T,
        "",
        "{} channel",
        ("ch", "chan", "frequency range", "channel position"),
        _CHANNELS,
    ),
    KnownDimension(
        "environment",
        "environment",
        _T,
        "",
        "{} environment",
        ("env", "environment class", "test environment"),
        _ENVIRONMENTS,
    ),
    KnownDimension("band", "band", _T, "", "band {}", ("operating band", "freq band")),
    KnownDimension("mode", "mode", _T, "", "mode {}", ("operating mode", "state")),
    KnownDimension("port", "port", _T, "", "port {}", ("connector", "rf port")),
    KnownDimension("beam", "beam", _T, "", "beam {}", ("beam id", "beam index", "beam no")),
    KnownDimension("modulation", "modulation", _T, "", "{}", ("mod", "mcs", "modcod", "constellation")),
    KnownDimension("waveform", "waveform", _T, "", "{}", ("test model", "signal", "test signal")),
    KnownDimension(
        "resource_allocation", "resource allocation", _T, "", "{}", ("rb allocation", "uplink rb", "rb")
    ),
    KnownDimension("phase_state", "phase state", _T, "", "phase state {}", ("phase bit",)),
    KnownDimension("warm_up", "warm-up time", _N, "s", "after {}", ("warm up time", "warmup")),
    KnownDimension("duty_cycle", "duty cycle", _N, "%", "{} duty cycle", ("duty",)),
    KnownDimension("sample_count", "number of samples", _N, "", "{} samples", ("n samples", "samples")),
    KnownDimension("time", "time", _N, "s", "at {}", ("elapsed time",)),
)
