"""What is refused of figures that count where they are stated: DC power and interference half stated."""

from __future__ import annotations

from specflow.budgets.chain import Chain
from specflow.budgets.outputs import Output
from specflow.errors import CalculationError

_DC = ("dc_w", "efficiency", "added_efficiency")


def check_further(chain: Chain, output: Output) -> None:
    """Refuse what would be taken as nothing only because nobody stated it. CalculationError with place and remedy."""
    if "dc_w" in output.wants:
        _check_dc(chain, output)
    if "phase_noise" in output.wants:
        _check_interference(chain, output)


def _figures(chain: Chain, row: int) -> set[str]:
    return {read.role.figure for read in chain.lines if read.row == row}


def _check_dc(chain: Chain, output: Output) -> None:
    for row in range(len(chain.positions)):
        stated = _figures(chain, row)
        given = [figure for figure in _DC if figure in stated]
        if len(given) > 1:
            raise CalculationError(
                f"{output.parameter}: the position states its DC power in {len(given)} ways",
                where=chain.place(row),
                hint="keep one of dc_power, drain_efficiency and pae",
            )
        amplifies = any(
            float(chain.lines[number].figure(chain.lines[number].values).max()) > 0
            for number in chain.at(row, "gain")
        )
        if amplifies and not given:
            raise CalculationError(
                f"there is no DC power for {output.parameter}, and the position amplifies",
                where=chain.place(row),
                hint="add dc_power (0 W if it is counted elsewhere), drain_efficiency or pae",
            )
    for read in chain.lines:
        if read.role.figure in ("efficiency", "added_efficiency"):
            values = read.figure(read.values)
            if float(values.min()) <= 0 or float(values.max()) > 100:
                raise CalculationError(
                    f"{read.line.parameter} is {float(values.min()):.4g} to {float(values.max()):.4g} %",
                    where=f"budget {chain.budget.id}, {read.line.place}",
                    hint="an efficiency is above 0 and at most 100 %",
                )


def _check_interference(chain: Chain, output: Output) -> None:
    stated = set().union(*(_figures(chain, row) for row in range(len(chain.positions))))
    where = f"budget {chain.budget.id}"
    if "blocker" in stated and "phase_noise" not in stated and "blocker" in output.wants:
        raise CalculationError(
            "a blocker is stated, and no phase noise that would mix it into the channel",
            where=where,
            hint="give the mixer a line phase_noise at the offset of the blocker, or leave blocking_level out",
        )
    if "isolation" in stated and "leaked_noise" not in stated:
        raise CalculationError(
            "an isolation is stated, and no transmitter's noise that it keeps off",
            where=where,
            hint="give a line noise_density: the noise that the transmitter puts into the receive channel",
        )
    if "tones" not in stated or "tones" not in output.wants:
        return
    for row, position in enumerate(chain.positions):
        own = _figures(chain, row)
        if "gain" in own and not position.passive and "iip3" not in own:
            raise CalculationError(
                f"there is no third-order intercept for {output.parameter}: two tones are stated",
                where=chain.place(row),
                hint=f"add iip3 or oip3, or mark {position.block} as passive if it is",
            )
