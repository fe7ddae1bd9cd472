"""Reading limits as engineers write them."""

from __future__ import annotations

import pytest

from specflow.errors import ExpressionError
from specflow.limits import limit_text, limit_words, parse_limit
from specflow.model.limit import Limit, LimitState
from specflow.model.parameter import Better, Parameter

NOISE_FIGURE = Parameter(
    key="noise_figure", title="noise figure", group="noise", unit="dB", better=Better.LOWER
)
EIRP = Parameter(
    key="eirp", title="EIRP", group="power", unit="dBm", better=Better.HIGHER, aliases=("radiated power",)
)
IMBALANCE = Parameter(
    key="imbalance", title="amplitude error", group="array", unit="dB", better=Better.NEARER_ZERO
)
VSWR = Parameter(key="vswr", title="VSWR", group="match", unit="1", better=Better.LOWER)

SPELLINGS = [
    (">= 45 dBm", ">= 45 dBm"),
    ("≥45dBm", ">= 45 dBm"),
    ("=> 45 dBm", ">= 45 dBm"),
    ("45 dBm min", ">= 45 dBm"),
    ("45 dBm minimum", ">= 45 dBm"),
    ("45 dBm or more", ">= 45 dBm"),
    ("min 45 dBm", ">= 45 dBm"),
    ("min. 45 dBm", ">= 45 dBm"),
    ("at least 45 dBm", ">= 45 dBm"),
    ("shall be at least 45 dBm", ">= 45 dBm"),
    ("not less than 45 dBm", ">= 45 dBm"),
    ("> 17 dB", "> 17 dB"),
    ("< -36 dBm/MHz", "< -36 dBm/MHz"),
    ("less than −36 dBm/MHz", "< -36 dBm/MHz"),
    ("-28 dBc max", "<= -28 dBc"),
    ("max -28 dBc", "<= -28 dBc"),
    ("MAX -28 dBc", "<= -28 dBc"),
    ("−28\u00a0dBc max", "<= -28 dBc"),
    ("<= -28.0 dBc", "<= -28.0 dBc"),
    ("shall not exceed -28 dBc", "<= -28 dBc"),
    ("54 ± 1.5 dBm", "54 dBm ± 1.5 dB"),
    ("54 +/- 1.5 dBm", "54 dBm ± 1.5 dB"),
    ("54 dBm ± 1.5 dB", "54 dBm ± 1.5 dB"),
    ("26 +2/-3 dBm", "26 dBm +2 dB/-3 dB"),
    ("26 dBm +2/−3 dB", "26 dBm +2 dB/-3 dB"),
    ("-6..4 dB", "-6 dB..4 dB"),
    ("-6 to +4 dB", "-6 dB..4 dB"),
    ("3–5 V", "3 V..5 V"),
    ("between 3 and 5 V", "3 V..5 V"),
    ("from 3 to 5 V", "3 V..5 V"),
    ("± 0.1 ppm", "± 0.1 ppm"),
    ("±0.1ppm", "± 0.1 ppm"),
    ("<= 5 %", "<= 5 %"),
    ("<= 2.5% rms", "<= 2.5 % rms"),
    ("5 V ± 5 %", "5 V ± 5 %"),
    ("10 GHz ± 20 ppm", "10 GHz ± 20 ppm"),
    ("within 3.4 dB of P_rated[dBm]", "(P_rated[dBm]) dBm ± 3.4 dB"),
    ("P_rated_dBm ± 3.4 dB", "(P_rated[dBm]) dBm ± 3.4 dB"),
    ("min(-5, max(P_rated - 35, -12)) dBm max", "<= (min(-5, max(P_rated - 35, -12))) dBm"),
    ("≤ 3,2 dB", "<= 3.2 dB"),
    ("<= 1,234.5 V", "<= 1234.5 V"),
    ("<= 1.5:1", "<= 1.5 plain"),
    ("43 + 10 log10(P_W) dB min", ">= (43 + 10 * log10(P[W])) dB"),
    ("3 V <= supply <= 5 V", "supply: {stricter(>= 3 V; <= 5 V)}"),
    ("gain >= 20 dB", "gain >= 20 dB"),
    ("no limit", "no limit"),
    ("no upper limit", "no limit"),
    ("n/a", "not applicable"),
    ("TBD", "TBD"),
    ("TBD dBm max", "<= TBD dBm"),
    ("<= TBD dBm", "<= TBD dBm"),
    ("FFS", "FFS"),
    ("-40 dBr or -39 dBm/MHz max, whichever is looser", "looser(<= -40 dBr; <= -39 dBm/MHz)"),
    ("28 dBc min or -13 dBm/MHz max, whichever is looser", "looser(>= 28 dBc; <= -13 dBm/MHz)"),
    ("28 dBc min or -13 dBm/MHz max", "looser(>= 28 dBc; <= -13 dBm/MHz)"),
    ("-5 dBm max or -12 dBm max, whichever is lower", "stricter(<= -5 dBm; <= -12 dBm)"),
    ("-5 dBm max or -12 dBm max, whichever is the higher", "looser(<= -5 dBm; <= -12 dBm)"),
    ("5 dB min or 12 dB min, whichever is lower", "looser(>= 5 dB; >= 12 dB)"),
    (">= 3 V and <= 5 V", "stricter(>= 3 V; <= 5 V)"),
    (">= 3 V, <= 5 V", "stricter(>= 3 V; <= 5 V)"),
    ("min 3 V; max 5 V", "stricter(>= 3 V; <= 5 V)"),
    ("45 dBm (min)", ">= 45 dBm"),
    ("up to 50 dBm", "<= 50 dBm"),
    ("45 … 50 dBm", "45 dBm..50 dBm"),
    ("26 -3/+2 dBm", "26 dBm +2 dB/-3 dB"),
    ("<= P_EIRP[dBm] - P_TRP[dBm] - 30 dBm", "<= (P_EIRP[dBm] - P_TRP[dBm] - 30) dBm"),
]


@pytest.mark.parametrize(("typed", "canonical"), SPELLINGS, ids=[typed for typed, _ in SPELLINGS])
def test_engineers_spelling_reads_as_its_canonical_text(typed: str, canonical: str) -> None:
    limit = parse_limit(typed)
    assert limit.text == typed
    assert limit_text(limit) == canonical
    assert parse_limit(canonical).tree == limit.tree
    assert Limit.model_validate_json(limit.model_dump_json()) == limit


@pytest.mark.parametrize(
    ("typed", "words"),
    [
        (">= 45 dBm", "at least 45 dBm"),
        ("< -36 dBm/MHz", "less than -36 dBm/MHz"),
        ("-6..4 dB", "from -6 dB to 4 dB"),
        (
            "26 +2/-3 dBm",
            "26 dBm, up to 2 dB above and up to 3 dB below (the tolerance written in dBm is read as dB)",
        ),
        ("54 ± 1.5 dBm", "54 dBm ± 1.5 dB (the tolerance written in dBm is read as dB)"),
        ("± 0.1 ppm", "within ± 0.1 ppm"),
        (
            "min(-5, max(P_rated - 35, -12)) dBm max",
            "at most the smaller of (-5 and the larger of (P_rated - 35 and -12)) dBm",
        ),
        (
            ">= 17 dB if adjacent_power > -35 dBm",
            "at least 17 dB, only where adjacent_power is more than -35 dBm",
        ),
        ("TBD", "to be determined (TBD): it blocks"),
        ("TBR 3.2 dB max", "at most 3.2 dB; to be reviewed (TBR): it computes but cannot close"),
        (
            "<= -50 dBm test tolerance 1.5 dB",
            "at most -50 dBm; test tolerance 1.5 dB on the limit, kept apart",
        ),
        ("<= -85.54 dBm rounded to 0.1", "at most -85.54 dBm; the limit rounded to 0.1 dBm"),
        ("<= 1.5:1", "at most 1.5"),
    ],
)
def test_limit_is_echoed_in_words(typed: str, words: str) -> None:
    assert limit_words(parse_limit(typed)) == words


def test_bare_value_takes_the_direction_that_is_better_and_says_so() -> None:
    limit = parse_limit("3.2 dB", parameter=NOISE_FIGURE)
    assert limit_text(limit) == "<= 3.2 dB"
    assert "lower is better" in limit_words(limit, NOISE_FIGURE)
    assert limit_text(parse_limit("45 dBm", parameter=EIRP)) == ">= 45 dBm"
    assert limit_text(parse_limit("0.5 dB", parameter=IMBALANCE)) == "± 0.5 dB"


def test_bare_value_without_parameter_is_refused_with_the_remedy() -> None:
    with pytest.raises(ExpressionError) as caught:
        parse_limit("3.2 dB")
    assert caught.value.message == "the limit has no direction"
    assert ">=" in caught.value.hint


def test_number_without_unit_takes_that_of_the_parameter_only() -> None:
    assert parse_limit("<= 3.2", parameter=NOISE_FIGURE).unit == "dB"
    assert parse_limit("<= 1.5", parameter=VSWR).unit == "1"
    with pytest.raises(ExpressionError, match="no unit"):
        parse_limit("<= 3.2")


def test_the_requirements_own_parameter_may_be_named() -> None:
    assert parse_limit("eirp >= 45 dBm", parameter=EIRP).tree == parse_limit(">= 45 dBm").tree


@pytest.mark.parametrize(
    "typed", ["TBR 3.2 dB max", "3.2 dB max (TBR)", "<= 3.2 dB TBR", "TBR: <= 3.2 dB", "[3.2] dB max"]
)
def test_tbr_computes_but_is_marked(typed: str) -> None:
    limit = parse_limit(typed)
    assert limit.state is LimitState.TBR
    assert limit.tree == parse_limit("<= 3.2 dB").tree


@pytest.mark.parametrize(
    "typed", ["TBD", "FFS", "<= TBD dBm", "cases(when band == n257: >= 3 dB; otherwise: TBD)"]
)
def test_what_has_no_number_yet_is_tbd(typed: str) -> None:
    assert parse_limit(typed).state is LimitState.TBD


def test_trailing_zeros_are_kept() -> None:
    assert limit_text(parse_limit(">= 4.0 dB")) == ">= 4.0 dB"


REFUSED = [
    ("", 1, "empty"),
    (">= 45", 4, "no unit"),
    (">= 45 dBx", 7, "not a unit"),
    ("3-5 V", 1, "range or a tolerance"),
    ("26 +2 -3 dBm", 1, "range or a tolerance"),
    ("0.05 ppm + 12 Hz max", 1, "without the carrier frequency"),
    ("<= 3 dB + 2 MHz", 4, "do not add"),
    ("P_rated ± 3.4 dB", 1, "no unit"),
    ("45 dBm + 3 dBm max", 1, "two levels do not add"),
    ("<= P[dBm] + Q[dBm] dBm", 4, "two levels do not add"),
    ("45 dBm - 50 dBm max", 1, "is a ratio"),
    ("-95 dB max at 100 kHz", 12, "which frequency is 100 kHz"),
    ("3.2 dB max @ 25 °C", 12, "whose temperature is 25 °C"),
    ("<= 1,234 V", 5, "may be 1.234 or 1234"),
    ("<= max(3,2) dB", 9, "may be two values or 3.2"),
    ("= 5 dB", 1, "cannot be proved"),
    ("5..3 dB", 1, "above the upper"),
    ("TBR", 4, "needs its number"),
    (">= 45 dBm and", 14, "text ends"),
    (">= 45 dBm nonsense", 11, "nothing can be made of"),
    (">= 3 dB or 4 dB min and 5 dB min", 25, "mixed"),
    ("<= log(3) dB", 4, "base 10 or e"),
    ("<= __import__('os') dB", 4, "not a function"),
    ("mask(offset, max dBm: 0..5: 3)", 6, "axis and unit"),
    (">= 3 dB if frequency", 12, "value stands where a condition"),
    ("54 dBm ± 5 %", 1, "means nothing"),
    ("<= 1e999 dB", 4, "too large"),
]


@pytest.mark.parametrize(("typed", "column", "message"), REFUSED, ids=[typed for typed, _, _ in REFUSED])
def test_refusal_names_the_column_and_what_is_wrong(typed: str, column: int, message: str) -> None:
    with pytest.raises(ExpressionError) as caught:
        parse_limit(typed)
    assert message in caught.value.message
    assert caught.value.where == f"column {column}"


def test_hostile_texts_are_refused_not_executed_and_not_deep() -> None:
    for text in (
        "(" * 500,
        "-" * 3000 + "1 dB",
        ">= " + "1+" * 1500 + "1 dB",
        "not " * 900,
        "{" * 900,
        "looser(" * 400,
    ):
        with pytest.raises(ExpressionError):
            parse_limit(text)
    with pytest.raises(ExpressionError, match="characters"):
        parse_limit(">= 1 dB " + " " * 5000)
