"""The quantities of a budget as formulas over the columns of its chain."""

from __future__ import annotations

import math

from specflow.reports.calculation_chain import BOLTZMANN, T0, ChainTable
from specflow.reports.calculation_further import blocking_term, desense_term, efficiency_term
from specflow.reports.calculation_grid import Term


def quantity_term(chain: ChainTable, parameter: str, row: int) -> Term | None:
    """Return a quantity with the chain cut off behind a position, from the columns of the chain.

    None for a quantity that this sheet does not calculate.
    """
    if not chain.is_cascade:
        return chain.own("amount_sum", row)
    match parameter:
        case "gain":
            return chain.own("gain_sum", row)
        case "noise_figure":
            return chain.own("nf_sum", row)
        case "noise_temperature":
            return _temperature(chain, row)
        case "system_noise_temperature":
            return _system(chain, row)
        case "g_over_t":
            gain, kelvin = chain.whole("antenna_gain"), _system(chain, row)
            return gain - Term(f"10*LOG10({kelvin.text})", 10.0 * math.log10(kelvin.value))
        case "noise_floor":
            return _floor(chain, row)
        case "noise_density":
            return chain.own("gain_sum", row) + _noise_power(chain, row, with_bandwidth=False)
        case "sensitivity" | "refsens":
            return _floor(chain, row) + chain.whole("snr")
        case "iip3" | "iip2" | "ip1db":
            return chain.own(f"{parameter}_sum", row)
        case "oip3" | "oip2":
            return chain.own(f"i{parameter[1:]}_sum", row) + chain.own("gain_sum", row)
        case "op1db":
            return _compression(chain, row)
        case "output_power":
            return chain.own("level_sum", row)
        case "eirp":
            return chain.own("level_sum", row) + chain.own("antenna_sum", row)
        case "output_backoff":
            return _compression(chain, row) - chain.own("level_sum", row)
        case "sfdr":
            free = chain.own("iip3_sum", row) - _floor(chain, row)
            return Term(f"2/3*({free.text})", 2.0 / 3.0 * free.value)
        case "aclr":
            return _leakage(chain, row)
        case "dc_power":
            return chain.own("dc_sum", row)
        case "total_efficiency" | "pae":
            return efficiency_term(chain, row, is_added=parameter == "pae")
        case "desensitisation":
            return desense_term(chain, row, _floor(chain, row))
        case "blocking_level":
            return blocking_term(chain, row, _floor(chain, row))
    return None


def _leakage(chain: ChainTable, row: int) -> Term:
    """2·(OIP3 - level) and the constant of the gap between the channels, -10·log((1.5 - s)³/3)."""
    width, spacing = chain.fixed["bandwidth"], chain.fixed["spacing"]
    start = spacing.value / width.value - 0.5
    gap = Term(
        f"10*LOG10((1.5-({spacing.text}/{width.text}-0.5))^3/3)",
        10.0 * math.log10((1.5 - start) ** 3 / 3.0),
    )
    apart = chain.own("iip3_sum", row) + chain.own("gain_sum", row) - chain.own("level_sum", row)
    return Term(f"2*({apart.text})", 2.0 * apart.value) - gap


def _temperature(chain: ChainTable, row: int) -> Term:
    noise, t0 = chain.own("nf_sum", row), chain.fixed["t0"]
    return Term(f"{t0.text}*(10^({noise.text}/10)-1)", T0 * (10.0 ** (noise.value / 10.0) - 1.0))


def _system(chain: ChainTable, row: int) -> Term:
    source = chain.fixed.get("source") or chain.whole("source_k")
    own = _temperature(chain, row)
    found = Term(f"{source.text}+{own.text}", source.value + own.value)
    if (
        chain.outcome.turns
    ):  # noise figures count the image of the source at 290 K; put what it is in its place
        weight, t0 = chain.own("image_weight", row), chain.fixed["t0"]
        found += Term(f"{weight.text}*({source.text}-{t0.text})", weight.value * (source.value - T0))
    return Term(f"({found.text})", found.value)


def _noise_power(chain: ChainTable, row: int, *, with_bandwidth: bool) -> Term:
    kelvin, boltzmann = _system(chain, row), chain.fixed["k"]
    text, value = f"{boltzmann.text}*{kelvin.text}*1000", BOLTZMANN * kelvin.value * 1e3
    if with_bandwidth:
        bandwidth = chain.fixed["bandwidth"]
        text, value = f"{text}*{bandwidth.text}", value * bandwidth.value
    return Term(f"10*LOG10({text})", 10.0 * math.log10(value))


def _floor(chain: ChainTable, row: int) -> Term:
    return _noise_power(chain, row, with_bandwidth=True)


def _compression(chain: ChainTable, row: int) -> Term:
    return chain.own("ip1db_sum", row) + chain.own("gain_sum", row) - Term("1", 1.0)
