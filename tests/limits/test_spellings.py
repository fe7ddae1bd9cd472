"""The spellings that engineers type: how each is read, in words, and what each refusal says to do.

The list is common practice of the trade, no source. Every refusal quotes a spelling that works.
"""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import ExpressionError
from specflow.limits import limit_text, limit_words, parse_limit
from specflow.parameters import load_dictionary

PARAMETERS = load_dictionary()
HIGHER = "no direction is written; higher is better, so it is read as at least"
LOWER = "no direction is written; lower is better, so it is read as at most"
OFFSET = "the value after '@' is read as the offset from the carrier"
DOWN = "the range is written from its upper end down"
AS_DB = "the tolerance written in dBm is read as dB"

ABOUT_ZERO = "(no nominal value is written, so the tolerances are read about zero)"
READ = [
    # two sides about zero
    ("frequency_error", "+9/-5 ppm", f"from -5 ppm to 9 ppm {ABOUT_ZERO}"),
    ("frequency_error", "-5 / +9 ppm", f"from -5 ppm to 9 ppm {ABOUT_ZERO}"),
    ("frequency_error", "+9 ppm/-5 ppm", f"from -5 ppm to 9 ppm {ABOUT_ZERO}"),
    ("gain", "-1/+0,5 dB", f"from -1 dB to 0.5 dB {ABOUT_ZERO}"),
    # one side
    ("gain", "> 20dB", "more than 20 dB"),
    ("gain", "≥ +20 dB", "at least 20 dB"),
    ("gain", "> = 20 dB", "at least 20 dB"),
    ("gain", "≮ 20 dB", "at least 20 dB"),
    ("gain", "≯ 20 dB", "at most 20 dB"),
    ("gain", "min. 20 dB", "at least 20 dB"),
    ("gain", "Min: 20 dB", "at least 20 dB"),
    ("gain", "min = 20 dB", "at least 20 dB"),
    ("gain", "a minimum of 20 dB", "at least 20 dB"),
    ("gain", "20dBmin", "at least 20 dB"),
    ("gain", "20dBmax", "at most 20 dB"),
    ("gain", "20dB(min)", "at least 20 dB"),
    ("gain", "20 dB (min.)", "at least 20 dB"),
    ("gain", "20 dB min.", "at least 20 dB"),
    ("gain", "20 dB or greater", "at least 20 dB"),
    ("gain", "20 dB and above", "at least 20 dB"),
    ("gain", "must be at least 20 dB", "at least 20 dB"),
    ("gain", "Gain shall be at least 20 dB", "at least 20 dB"),
    ("gain", "Gain: >= 20 dB", "at least 20 dB"),
    ("gain", "20 dB ≤ gain", "at least 20 dB"),
    ("gain", "shall exceed 20 dB", "more than 20 dB"),
    ("gain", "not lower than 20 dB", "at least 20 dB"),
    ("dc_power", "max. 5 W", "at most 5 W"),
    ("dc_power", "no more than 5 W", "at most 5 W"),
    ("dc_power", "not exceeding 5 W", "at most 5 W"),
    ("dc_power", "1 000.5 W max", "at most 1000.5 W"),
    ("dc_power", "1.000,5 W max", "at most 1000.5 W"),
    ("output_power", "10 mW max", "at most 10 mW"),
    ("eirp", "max. 45 dBm e.i.r.p.", "at most 45 dBm"),
    ("spurious_relative", "<=-60dBc", "at most -60 dBc"),
    ("settling_time", "< 100 ns", "less than 100 ns"),
    ("evm", "10% max", "at most 10 %"),
    ("vswr", "2:1 max", "at most 2"),
    ("vswr", "1:2 max", "at most 2 (1:2 is read as 2:1)"),
    ("vswr", "≤ 1.5:1", "at most 1.5"),
    ("bit_error_rate", "1e-6 max", "at most 1e-6"),
    ("bit_error_rate", "1×10^-6 max", "at most 1e-6"),
    ("bit_error_rate", "10⁻⁶ max", "at most 1e-6"),
    ("supply_voltage", "28 VDC max", "at most 28 V"),
    ("noise_density", "-174 dBm/Hz", f"at most -174 dBm/Hz ({LOWER})"),
    # the direction comes from the parameter
    ("gain", "20 dB", f"at least 20 dB ({HIGHER})"),
    ("gain", "20 dB or better", f"at least 20 dB ({HIGHER})"),
    ("gain", "better than 20 dB", f"at least 20 dB ({HIGHER})"),
    ("acpr_relative", "better than -30 dBc", f"at most -30 dBc ({LOWER})"),
    ("vswr", "1.5 : 1", f"at most 1.5 ({LOWER})"),
    # two sides
    ("gain", "20 ... 23 dB", "from 20 dB to 23 dB"),
    ("gain", "20 … 23 dB", "from 20 dB to 23 dB"),
    ("gain", "20…23dB", "from 20 dB to 23 dB"),
    ("gain", "20 dB to 23 dB", "from 20 dB to 23 dB"),
    ("gain", "20 dB – 23 dB", "from 20 dB to 23 dB"),
    ("gain", "≥20 dB, ≤23 dB", "at least 20 dB and at most 23 dB"),
    ("gain", "≥ 20 dB & ≤ 23 dB", "at least 20 dB and at most 23 dB"),
    ("gain", ">= 20 dB && <= 23 dB", "at least 20 dB and at most 23 dB"),
    ("gain", "20 dB min, 23 dB max", "at least 20 dB and at most 23 dB"),
    ("gain", "20 dB min / 23 dB max", "at least 20 dB and at most 23 dB"),
    ("gain", "28 < gain < 32 dB", "more than 28 dB and less than 32 dB"),
    ("gain_slope", "0 to -3 dB/GHz", f"from -3 dB/GHz to 0 dB/GHz ({DOWN})"),
    ("junction_temperature", "-40…+85 °C", "from -40 °C to 85 °C"),
    ("supply_voltage", "22 to 36 VDC", "from 22 V to 36 V"),
    # tolerances
    ("gain", "22 (+1/-0.5) dB", "22 dB, up to 1 dB above and up to 0.5 dB below"),
    ("gain", "22 dB (+1/-0.5)", "22 dB, up to 1 dB above and up to 0.5 dB below"),
    ("gain", "22 dB (+1 / -0.5 dB)", "22 dB, up to 1 dB above and up to 0.5 dB below"),
    ("gain", "22 dB, +1/-0.5 dB", "22 dB, up to 1 dB above and up to 0.5 dB below"),
    ("output_power", "22 (+1/-0.5) dBm", f"22 dBm, up to 1 dB above and up to 0.5 dB below ({AS_DB})"),
    ("gain", "30 (±1) dB", "30 dB ± 1 dB"),
    ("gain", "30 dB (± 1 dB)", "30 dB ± 1 dB"),
    ("gain", "30 dB nominal ± 1 dB", "30 dB ± 1 dB"),
    ("gain_flatness", "+/-0.5dB", "within ± 0.5 dB"),
    ("phase_error", "± 5°", "within ± 5 deg"),
    ("supply_voltage", "5 V ± 5 %", "5 V ± 5 %"),
    ("supply_voltage", "3.3V±10%", "3.3 V ± 10 %"),
    ("supply_voltage", "28 V DC ± 4 V", "28 V ± 4 V"),
    # a typical value is no limit
    ("noise_figure", "2.0 dB typ / 2.5 dB max", "at most 2.5 dB (2.0 dB typ is no limit and is left out)"),
    ("noise_figure", "2.0 typ, 2.5 max dB", "at most 2.5 dB (2.0 typ is no limit and is left out)"),
    ("noise_figure", "typ. 2 dB, max. 2.5 dB", "at most 2.5 dB (typ. 2 dB is no limit and is left out)"),
    ("noise_figure", "2.5 dB max (2.0 dB typ)", "at most 2.5 dB (2.0 dB typ is no limit and is left out)"),
    (
        "noise_figure",
        "min 1 dB / typ 2 dB / max 3 dB",
        "at least 1 dB and at most 3 dB (typ 2 dB is no limit and is left out)",
    ),
    # at an offset, in a bandwidth
    (
        "phase_noise",
        "-80 dBc/Hz @ 10 kHz; -100 dBc/Hz @ 100 kHz",
        "where offset is 10 kHz: at most -80 dBc/Hz; where offset is 100 kHz: at most -100 dBc/Hz; otherwise nothing "
        f"is required ({LOWER}; {OFFSET})",
    ),
    (
        "phase_noise",
        "≤ -80 dBc/Hz at 10 kHz offset, ≤ -120 dBc/Hz at 1 MHz offset",
        "where offset is 10 kHz: at most -80 dBc/Hz; where offset is 1 MHz: at most -120 dBc/Hz; otherwise nothing is "
        "required",
    ),
    ("spurious_emission", "< -36 dBm in 100 kHz RBW", "less than -36 dBm in 100 kHz"),
    ("spurious_emission", "< -36 dBm (RBW 100 kHz)", "less than -36 dBm in 100 kHz"),
    ("spurious_emission", "-36 dBm max, RBW = 100 kHz", "at most -36 dBm in 100 kHz"),
    # not settled
    ("noise_figure", "3.5 dB max, TBC", "at most 3.5 dB; to be reviewed (TBR): it computes but cannot close"),
    ("noise_figure", "≤3.5dB(TBC)", "at most 3.5 dB; to be reviewed (TBR): it computes but cannot close"),
    ("noise_figure", "t.b.d.", "to be determined (TBD): it blocks"),
]

REFUSED = [
    ("eirp", "45", "no unit and no direction", ">= 45 dBm"),
    ("eirp", "45 dBm", "no direction", "<= 45 dBm"),
    ("eirp", "better than 45 dBm", "does not say whether more or less is better", ">= 45 dBm"),
    ("eirp", "EIRP = 45 dBm", "an exact value cannot be proved", "54 ± 1.5 dBm"),
    ("gain", "22 +1 -0.5 dB", "range or a tolerance", "22 +1/-0.5 dB"),
    ("gain", "22 dB +1 dB -0.5 dB", "range or a tolerance", "22 +1/-0.5 dB"),
    ("gain", "20 - 23 dB", "range or a tolerance", "20..23 dB"),
    ("gain", "20dB-23dB", "range or a tolerance", "20..23 dB"),
    ("gain", "20/23 dB", "range or a tolerance", "20..23 dB"),
    ("gain", "23..20 dB", "above the upper one", "20..23 dB"),
    ("gain", "2.0 dB typ", "a typical or nominal value is no limit", ">= 2.0 dB"),
    ("gain", "20 dB nominal", "a typical or nominal value is no limit", ">= 20 dB"),
    ("gain", "1:2 min", "may be 2 or its inverse", "<= 2:1"),
    ("gain", ". 23 dB", "a number or a name belongs here", ">= 23 dB"),
    ("gain", ">= 20 dBx", "not a unit", ">= 20 dB"),
    ("gain", "20 dB 23 dB", "nothing can be made of '23 dB'", ">= 20 dB"),
    (
        "noise_temperature",
        "<= 150 K at 23 °C, <= 190 K at 55 °C",
        "whose temperature is 23 °C: ambient, baseplate, case, junction or board?",
        "by temperature_ambient[°C] (23: <= 150 K; 55: <= 190 K)",
    ),
    ("gain", "20 dB @ 29 GHz", "which frequency is 29 GHz", "by frequency[GHz] (29: >= 20 dB)"),
    ("gain", "≥ 20 dB over 27.5-30 GHz", "nothing can be made of", "by frequency[GHz] (27.5..30: >= 20 dB)"),
    (
        "gain",
        "27.5-28 GHz: 45 dB; 28-30 GHz: 46 dB",
        "does not say which frequency",
        "by frequency[GHz] (27.5..28: ",
    ),
    ("gain", "20 dB @ 5 V", "which voltage is 5 V?", "by supply_voltage[V] (5: >= 20 dB)"),
    (
        "frequency_error",
        "<= 0.1 ppm + 12 Hz",
        "without the carrier frequency",
        "± (0.1 ppm of carrier + 12 Hz)",
    ),
    ("g_over_t", "≥ −5 dBK^-1", "is not computed", ">= 5 dB/K"),
    ("occupied_bandwidth", "99 % within 36 MHz", "nothing can be made of", "<= 36 MHz"),
    ("side_lobe_level", "≤ 29 − 25 log θ dBi", "argument in parentheses", "(29 - 25 * log10(theta)) dBi max"),
    ("gain", "20 ... 23 dB over temperature", "nothing can be made of 'over temperature'", "20 dB..23 dB"),
    ("evm", "≤ 3 % rms (≤ 8 % peak)", "nothing can be made of", "<= 3 % rms"),
    ("settling_time", "< 250 µs to within ±0.1 ppm", "nothing can be made of 'to within", "< 250 µs"),
    ("pointing_error", "0.2° rms, 0.5° max", "nothing can be made of ', 0.5° max'", "<= 0.2 deg rms"),
    ("output_power", "45 dBm, 50 dBm max", "nothing can be made of ', 50 dBm max'", "<= 45 dBm"),
    ("supply_voltage", "28 V +10 % -15 %", "do not add", "28 V ± 10 %"),
    ("gain", "20 dB +10 %", "do not add", "28 dB ± 1 dB"),
    ("frequency_error", "-5/9 ppm", "a quotient of plain numbers", "5..9 ppm"),
    ("mask_emission", "mask", "'mask' begins a limit of several parts", "mask(offset[MHz], max dBm"),
    ("mask_emission", "mask over offset: 5 MHz -13 dBm", "'mask' begins", "mask(offset[MHz], max dBm"),
    (
        "spurious_emission",
        "looser of -36 dBm and -60 dBc",
        "'looser' begins",
        "looser(<= -36 dBm; <= -60 dBc)",
    ),
    ("gain", "if frequency > 28 GHz: >= 20 dB", "'if' is a word", ">= 20 dB if frequency > 28 GHz"),
    ("gain", "TBC", "TBC needs its number", "TBR <= 3.2 dB"),
    ("gain", "-", "is no limit", "TBD"),
    ("gain", "—", "is no limit", "TBD"),
    ("gain", "see note 3", "is no limit", "TBD"),
    ("gain", "as high as possible", "is no limit", "TBD"),
    ("gain", "", "is empty", "TBD"),
]


def test_the_list_is_long() -> None:
    assert len(READ) + len(REFUSED) >= 100


@pytest.mark.parametrize(("key", "typed", "words"), READ, ids=[typed for _, typed, _ in READ])
def test_spelling_is_read_and_said_back(key: str, typed: str, words: str) -> None:
    limit = parse_limit(typed, parameter=PARAMETERS.get(key))
    assert limit_words(limit) == words
    assert parse_limit(limit_text(limit)).tree == limit.tree


@pytest.mark.parametrize(
    ("key", "typed", "message", "instead"), REFUSED, ids=[typed for _, typed, _, _ in REFUSED]
)
def test_refusal_says_what_is_missing_and_a_spelling_that_works(
    key: str, typed: str, message: str, instead: str
) -> None:
    parameter = PARAMETERS.get(key)
    with pytest.raises(ExpressionError) as caught:
        parse_limit(typed, parameter=parameter)
    assert message in caught.value.message
    assert instead in caught.value.hint
    working = [text for text in re.findall(r"'([^']+)'", caught.value.hint) if _is_read(text, key)]
    assert working, caught.value.hint
    assert any(instead in text for text in working)


def _is_read(text: str, key: str) -> bool:
    try:
        parse_limit(text, parameter=PARAMETERS.get(key))
    except ExpressionError:
        return False
    return True


PIECES = (
    ">= <= < > ± + - / @ ( ) , ; .. … : = & 45 2.5 1e-6 0 23 dB dBm V GHz °C % dBc/Hz min max typ to at in or and TBR "
    "TBD better than note RBW P_rated mask cases by if nominal 3,5 whichever"
)


@given(
    pieces=st.lists(st.sampled_from(PIECES.split()), max_size=8),
    key=st.sampled_from(["gain", "eirp", "phase_noise", "vswr", "supply_voltage"]),
)
def test_whatever_is_typed_is_read_or_refused_with_a_spelling_that_works(pieces: list[str], key: str) -> None:
    try:
        limit = parse_limit(" ".join(pieces), parameter=PARAMETERS.get(key))
    except ExpressionError as error:
        assert any(_is_read(text, key) for text in re.findall(r"'([^']+)'", error.hint)), error.hint
    else:
        assert parse_limit(limit_text(limit)).tree == limit.tree
