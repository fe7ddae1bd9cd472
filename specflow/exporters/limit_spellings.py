"""How limits may be written: one spelling of each kind, for the guide in front of the workbook template."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class LimitSpelling:
    """What one wants to say, the key of a parameter it is said of, and the text of the cell."""

    title: str
    parameter: str
    text: str


LIMIT_SPELLINGS: tuple[LimitSpelling, ...] = (
    LimitSpelling("At least, at most", "eirp", ">= 45 dBm"),
    LimitSpelling("", "acpr_relative", "-28 dBc max"),
    LimitSpelling("Strictly above or below", "harmonics", "< -40 dBc"),
    LimitSpelling("A range", "output_power", "21..24 dBm"),
    LimitSpelling("A nominal value and tolerances", "output_power", "54 ± 1.5 dBm"),
    LimitSpelling("", "output_power", "26 +2/-3 dBm"),
    LimitSpelling("", "frequency_error", "± 7 ppm"),
    LimitSpelling("On a declared value", "output_power", "<= P_rated + 2 dB"),
    LimitSpelling("By formula", "eirp", "min(-5, max(P_rated - 35, -12)) dBm max"),
    LimitSpelling("Per bandwidth", "spurious_emission", "-50 dBW/4 kHz max"),
    LimitSpelling("", "spurious_emission", "<= -26 dBm in 1 MHz"),
    LimitSpelling("At offsets from the carrier", "phase_noise", "-95 dBc/Hz max @ 100 kHz"),
    LimitSpelling(
        "By band or another condition",
        "noise_figure",
        "by frequency[GHz] (71..74: <= 5.5 dB; 74..76: <= 6 dB)",
    ),
    LimitSpelling("", "eirp", "by band (n257: >= 22.4 dBm; n260: >= 20.6 dBm)"),
    LimitSpelling(
        "By several conditions", "gain", "cases(when frequency < 28 GHz: >= 20 dB; otherwise: >= 18 dB)"
    ),
    LimitSpelling("Only where something holds", "evm", "17.5 % max if modulation == QPSK"),
    LimitSpelling(
        "The looser or stricter of two", "spurious_emission", "-36 dBm or -60 dBc, whichever is looser"
    ),
    LimitSpelling("", "spurious_emission", "stricter(<= -36 dBm; <= -60 dBc)"),
    LimitSpelling(
        "A mask, in steps; its bandwidth may change",
        "mask_emission",
        "mask(offset[MHz], max dBm, in 1 MHz: 0..5: -5; 5..100: -13 in 10 MHz; except 40..50)",
    ),
    LimitSpelling(
        "A mask through points", "mask_emission", "mask(offset[MHz], max dBm, linear: 9: 0; 11: -20; 30: -40)"
    ),
    LimitSpelling("A share of a population", "eirp", ">= 20 dBm at 50 % of CDF over sphere"),
    LimitSpelling("To be reviewed: it computes, and cannot close", "noise_figure", "TBR 3.2 dB max"),
    LimitSpelling("To be determined", "noise_figure", "TBD"),
)
