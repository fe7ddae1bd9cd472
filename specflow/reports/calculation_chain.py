"""The chain of a budget on a worksheet: what is given, the lines as stated, and the working columns.

Every column has a key under which later formulas find its cells. The working columns are the textbook forms: for noise
F = 1 + Σ (F_i - 1)/G_before, for third-order products 1/IIP3 = Σ G_before/IIP3_i (or its squares).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import partial

import numpy as np

from specflow.model.budget import Law
from specflow.model.budget_outcome import BudgetOutcome, LineOutcome
from specflow.model.formula_sheet import CellLook
from specflow.reports.budget import FIGURE_TITLES, position_words, tolerance_words
from specflow.reports.calculation_forms import taken_term
from specflow.reports.calculation_further import dc_columns, interference_columns
from specflow.reports.calculation_grid import Floats, Grid, Maker, Term, cell_name, plain
from specflow.reports.calculation_image import image_columns

Named = Callable[[str], str]
BOLTZMANN = 1.380649e-23
"""J/K, exact in the SI."""
T0 = 290.0
"""K, the reference temperature of noise figures."""
_PORTS = ("iip3", "iip2", "ip1db")
_NOT_IN_COLUMNS = ("source_level", "snr", "image_noise_figure", "blocker", "tones", "leaked_noise", "isolation",
                   "allowed_rise")  # fmt: skip
_LEFT = 4  # columns in front of the figures: number, block, elements, physical temperature


class ChainTable:
    """The upper part of the worksheet while it is made; ``row`` is the next free one."""

    def __init__(self, outcome: BudgetOutcome, place: int, named: Named, grid: Grid, row: int) -> None:
        self.outcome = outcome
        self.place = place
        self.named = named
        self.grid = grid
        self.row = row
        self.lines: list[tuple[LineOutcome, Term]] = []
        self.figures: dict[str, list[Term | None]] = {}
        self.fixed: dict[str, Term] = {}
        self.temperatures: dict[int, Term] = {}
        self._given()
        self._lines()
        self._chain()

    @property
    def is_cascade(self) -> bool:
        """Whether the budget is a cascade."""
        return self.outcome.budget.law is Law.CASCADE

    def headers(self, *titles: str) -> None:
        """Put a row of headers."""
        for column, title in enumerate(titles):
            self.grid.text(self.row, column, title, CellLook.HEADER)
        self.row += 1

    def own(self, key: str, row: int) -> Term:
        """Return the cell of a column at one position."""
        found = self.figures[key][row]
        assert found is not None  # its column comes before
        return found

    def whole(self, figure: str) -> Term:
        """Return the sum of the lines of a figure over the whole chain."""
        terms = [taken_term(one.form, stated) for one, stated in self.lines if one.figure == figure]
        terms += [
            Term(f"10*LOG10({count})", 10.0 * math.log10(count))
            for count in (self.outcome.positions[row].count for row in self._rows_of(figure))
            if figure == "antenna_gain" and count > 1
        ]
        return Term(f"({'+'.join(term.text for term in terms)})", math.fsum(term.value for term in terms))

    def _rows_of(self, figure: str) -> list[int]:
        return sorted({one.row for one, _ in self.lines if one.figure == figure})

    # Given

    def _given(self) -> None:
        budget, outcome = self.outcome.budget, self.outcome
        if not self.is_cascade:
            return
        self.headers("", "Given for the chain", "Value", "Unit")
        if outcome.levels is not None and not self._stated("source_level"):
            self._fix("level", "Level at the input", outcome.levels[0], "dBm")
        if outcome.source_k is not None:
            if not self._stated("source_k"):
                self._fix("source", "Noise temperature of what feeds it", outcome.source_k, "K")
            self._fix("t0", "Reference temperature", T0, "K")
            self._fix("k", "Boltzmann constant", BOLTZMANN, "J/K", "0.000000E+00")
        if budget.bandwidth_hz is not None:
            self._fix("bandwidth", "Noise bandwidth", budget.bandwidth_hz, "Hz", "#,##0.###")
        if budget.channel_spacing_hz is not None:
            self._fix(
                "spacing", "Spacing of the adjacent channel", budget.channel_spacing_hz, "Hz", "#,##0.###"
            )
        self.row += 1

    def _fix(self, key: str, title: str, value: float | Floats, unit: str, format: str = "0.00##") -> None:
        self.grid.text(self.row, 1, title)
        self.fixed[key] = self.grid.by_point(self.row, 2, np.atleast_1d(value), title, format=format)
        self.grid.text(self.row, 3, unit)
        self.row += 1

    def _stated(self, figure: str) -> bool:
        return any(line.figure == figure for line in self.outcome.lines)

    # Lines

    def _lines(self) -> None:
        self.headers("#", "Block", "Line", "Value", "Unit", "Tolerance (not used here)", "", "", "Source")
        for one in self.outcome.lines:
            line = one.line
            self.grid.number(self.row, 0, line.position, CellLook.PLAIN, "0")
            self.grid.text(self.row, 1, position_words(self.outcome, one.row))
            self.grid.text(self.row, 2, self.named(line.parameter))
            name = f"{position_words(self.outcome, one.row)}, {self.named(line.parameter)} [{one.unit}]"
            stated = self.grid.by_point(self.row, 3, one.taken, name)
            self.grid.text(self.row, 4, one.unit)
            self.grid.text(self.row, 5, tolerance_words(line))
            self.grid.text(self.row, 8, line.source)
            self.lines.append((one, stated))
            self.row += 1
        self.row += 1

    def _of(self, row: int, figure: str) -> list[tuple[LineOutcome, Term]]:
        return [(one, term) for one, term in self.lines if one.row == row and one.figure == figure]

    # The chain

    def _chain(self) -> None:
        figures = [name for name in FIGURE_TITLES if name in self.outcome.figures and name != "source_k"]
        figures = [name for name in figures if name in ("gain", "noise_figure") or self._stated(name)]
        figures = [name for name in figures if name not in _NOT_IN_COLUMNS]
        start = self.row
        self._top = start + 1
        columns = self._columns(figures)
        for column, (title, _) in enumerate(columns, start=_LEFT):
            self.grid.text(start, column, title, CellLook.HEADER)
        for column, title in enumerate(("#", "Block", "Elements N", "Physical temperature [K]")):
            self.grid.text(start, column, title, CellLook.HEADER)
        for row, position in enumerate(self.outcome.positions):
            at = start + 1 + row
            self.grid.number(at, 0, position.order, CellLook.PLAIN, "0")
            self.grid.text(at, 1, position_words(self.outcome, row))
            count = self.grid.number(at, 2, position.count, CellLook.INPUT, "0")
            self._temperature(at, row)
            for column, (_, make) in enumerate(columns, start=_LEFT):
                term = make(row, count)
                if term is not None:
                    self.grid.formula(at, column, term)
                self._keep(row, column, at, term)
        self.row = start + len(self.outcome.positions) + 2

    def _columns(self, figures: Sequence[str]) -> list[tuple[str, Maker]]:
        """Return title and maker of every column of the chain; a maker sees the columns before its own."""
        self._kept: list[str] = []
        columns: list[tuple[str, Maker]] = []

        def add(key: str, title: str, make: Maker) -> None:
            self._kept.append(key)
            self.figures[key] = []
            columns.append((title, make))

        for name in figures:
            title, unit = FIGURE_TITLES[name]
            unit = unit or self.outcome.quantities[0].unit
            add(name, f"{title} [{unit}]", partial(self._figure, name))
        if "gain" in figures:
            add("gain_sum", "∑ Gain [dB]", lambda row, _: self.sum_so_far("gain", row))
        if self.outcome.turns:
            for key, title, make in image_columns(self):
                add(key, title, make)
        if "noise_figure" in figures:
            add("excess", "(F-1)/G before", self._excess)
            add("nf_sum", "∑ NF [dB]", lambda row, _: self._noise_sum(row))
        for name in _PORTS:
            if name in figures:
                power, words = self._power(name)
                title = FIGURE_TITLES[name][0]
                add(f"{name}_part", words, partial(self._part, name, power))
                add(f"{name}_sum", f"∑ {title} [dBm]", partial(self._port_sum, name, power))
        if self.outcome.levels is not None and "gain" in figures:
            add("level_sum", "Level behind [dBm]", lambda row, _: self._level(row))
        if {"dc_w", "efficiency", "added_efficiency"} & set(figures):
            for key, title, make in dc_columns(self):
                add(key, title, make)
        if any(self._stated(name) for name in ("blocker", "tones", "leaked_noise", "allowed_rise")):
            for key, title, make in interference_columns(self):
                add(key, title, make)
        if "antenna_gain" in figures:
            add("antenna_sum", "∑ Antenna gain [dBi]", lambda row, _: self.sum_so_far("antenna_gain", row))
        if "amount" in figures:
            add("amount_sum", f"∑ [{self.outcome.quantities[0].unit}]", lambda row, _: self._amount_sum(row))
        return columns

    def _keep(self, row: int, column: int, at: int, term: Term | None) -> None:
        kept = None if term is None else Term(cell_name(at, column, fixed=True), term.value)
        self.figures[self._kept[column - _LEFT]].append(kept)

    def _figure(self, figure: str, row: int, count: Term) -> Term | None:
        """Return one figure of a position from its lines, referred to its input and to all its elements."""
        lines = self._of(row, figure)
        if figure == "noise_figure" and not lines:
            return self._noise_of_loss(row)
        if not lines:
            return Term("0", 0.0) if figure in ("gain", "image_rejection") else None
        terms = [taken_term(one.form, stated) for one, stated in lines]
        if figure in _PORTS:
            return self._at_input(row, figure, lines[0][0], terms[0], count)
        if figure == "amount":
            terms = [self._of_elements(one, term, count) for (one, _), term in zip(lines, terms, strict=True)]
        if figure == "antenna_gain" and count.value > 1:
            terms.append(Term(f"10*LOG10({count.text})", 10.0 * math.log10(count.value)))
        if figure == "dc_w":
            return Term(f"{terms[0].text}*{count.text}", terms[0].value * count.value)
        return Term("+".join(term.text for term in terms), math.fsum(term.value for term in terms))

    def _of_elements(self, one: LineOutcome, term: Term, count: Term) -> Term:
        """Make one element's contribution that of the position; what N does is told in numbers beside it."""
        if one.factor != 1.0:
            term = Term(f"({term.text})*{plain(one.factor)}", term.value * one.factor)
        if one.offset == 0.0:
            return term
        steps = one.offset / (10.0 * math.log10(count.value))
        return Term(f"{term.text}+{plain(10.0 * steps)}*LOG10({count.text})", term.value + one.offset)

    def _at_input(self, row: int, figure: str, one: LineOutcome, term: Term, count: Term) -> Term:
        text, value = term.text, term.value
        if count.value > 1:
            text, value = f"{text}+10*LOG10({count.text})", value + 10.0 * math.log10(count.value)
        if one.port == "output":
            gain = self.own("gain", row)
            text, value = f"{text}-{gain.text}", value - gain.value
            if figure == "ip1db":
                text, value = f"{text}+1", value + 1.0
        return Term(text, value)

    def _noise_of_loss(self, row: int) -> Term:
        if not self.outcome.positions[row].passive:
            return Term("0", 0.0)
        gain, kelvin, t0 = self.own("gain", row), self.temperatures[row], self.fixed["t0"]
        value = 1.0 + (10.0 ** (-gain.value / 10.0) - 1.0) * kelvin.value / T0
        text = f"10*LOG10(1+(10^(-{gain.text}/10)-1)*{kelvin.text}/{t0.text})"
        return Term(text, 10.0 * math.log10(value))

    def _temperature(self, at: int, row: int) -> None:
        """Put the physical temperature of a position that makes the noise of its loss; 290 K where none is stated."""
        if self.outcome.positions[row].passive and "t0" in self.fixed:
            kelvin = self.outcome.temperature_k[row]
            name = f"{position_words(self.outcome, row)}, physical temperature [K]"
            self.temperatures[row] = self.grid.by_point(at, 3, np.where(np.isnan(kelvin), T0, kelvin), name)

    def _known(self, key: str, row: int) -> list[Term]:
        return [term for term in self.figures[key][: row + 1] if term is not None]

    def _range(self, key: str, row: int, *, own: Term | None = None) -> str:
        """Return the cells of a column from the first position to this one; empty cells count as nothing."""
        column = _LEFT + self._kept.index(key)
        top = self._top
        return f"{cell_name(top, column, fixed=True)}:{cell_name(top + row, column, fixed=True)}"

    def sum_so_far(self, key: str, row: int) -> Term:
        """Return the sum of a column up to a position."""
        return Term(f"SUM({self._range(key, row)})", math.fsum(term.value for term in self._known(key, row)))

    def _before(self, row: int) -> Term:
        return Term("0", 0.0) if row == 0 else self.own("gain_sum", row - 1)

    # Noise

    def _excess(self, row: int, count: Term) -> Term:
        figure = "image_noise_figure" if self.outcome.turns else "noise_figure"
        noise, before = self.own(figure, row), self._before(row)
        value = (10.0 ** (noise.value / 10.0) - 1.0) / 10.0 ** (before.value / 10.0)
        return Term(f"(10^({noise.text}/10)-1)/10^({before.text}/10)", value)

    def _noise_sum(self, row: int) -> Term:
        total = math.fsum(term.value for term in self._known("excess", row))
        return Term(f"10*LOG10(1+SUM({self._range('excess', row)}))", 10.0 * math.log10(1.0 + total))

    # Intercepts and compression

    def _power(self, figure: str) -> tuple[float, str]:
        """Return the power to which G_before/P counts, and the words for it."""
        coherent = self.outcome.budget.intermodulation == "coherent"
        match figure:
            case "iip3":
                return (1.0, "G before/IIP3") if coherent else (2.0, "(G before/IIP3)²")
            case "iip2":
                return (0.5, "√(G before/IIP2)") if coherent else (1.0, "G before/IIP2")
        return 1.0, "G before/IP1dB"

    def _part(self, figure: str, power: float, row: int, count: Term) -> Term | None:
        own = self.figures[figure][row]
        if own is None:
            return None
        before = self._before(row)
        value = 10.0 ** ((before.value - own.value) / 10.0 * power)
        return Term(f"10^(({before.text}-({own.text}))/10*{plain(power)})", value)

    def _port_sum(self, figure: str, power: float, row: int, count: Term) -> Term:
        cells = self._range(f"{figure}_part", row)
        total = math.fsum(term.value for term in self._known(f"{figure}_part", row))
        value = -10.0 / power * math.log10(total) if total > 0 else math.inf
        return Term(f'IF(SUM({cells})=0,"no bound",-10/{plain(power)}*LOG10(SUM({cells})))', value)

    # Level, sums

    def _level(self, row: int) -> Term:
        start, gain = self.start(), self.own("gain_sum", row)
        return Term(f"{start.text}+{gain.text}", start.value + gain.value)

    def start(self) -> Term:
        """Return the level at the input."""
        if "level" in self.fixed:
            return self.fixed["level"]
        one, stated = next((one, term) for one, term in self.lines if one.figure == "source_level")
        count = self.outcome.positions[one.row].count
        if count == 1:
            return stated
        return Term(f"({stated.text}+10*LOG10({count}))", stated.value + 10.0 * math.log10(count))

    def _amount_sum(self, row: int) -> Term:
        cells, values = self._range("amount", row), [term.value for term in self._known("amount", row)]
        match self.outcome.budget.law:
            case Law.POWER_SUM:
                return self._log_sum(cells, values, 10.0)
            case Law.VOLTAGE_SUM:
                return self._log_sum(cells, values, 20.0)
            case Law.ROOT_SUM_OF_SQUARES:
                return Term(f"SQRT(SUMSQ({cells}))", math.sqrt(math.fsum(value * value for value in values)))
        return Term(f"SUM({cells})", math.fsum(values))

    def _log_sum(self, cells: str, values: Sequence[float], scale: float) -> Term:
        """10^(x/scale) added: SUMPRODUCT does it over a range without an array formula; every position has a value."""
        total = math.fsum(10.0 ** (value / scale) for value in values)
        shown = plain(scale)
        return Term(f"{shown}*LOG10(SUMPRODUCT(10^({cells}/{shown})))", scale * math.log10(total))
