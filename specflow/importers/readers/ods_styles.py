"""Which cell styles of an OpenDocument sheet show a number otherwise than it is, and which hide a sheet.

Data styles are those of OpenDocument 1.3 part 3, 16.29: a percentage, date, time or currency style; a number style with
a display factor, or with text beside the number. A cell style names its data style, or its parent does.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from specflow.importers.readers.odd_cells import OddCell, OddKind

_KINDS = {
    "number:percentage-style": OddKind.PERCENT,
    "number:date-style": OddKind.DATE,
    "number:time-style": OddKind.DATE,
}
_DATA_STYLES = frozenset({*_KINDS, "number:number-style", "number:currency-style", "number:text-style"})


@dataclass(slots=True)
class _DataStyle:
    kind: str
    text: list[str] = field(default_factory=list)
    symbol: str = ""
    factor: str = "1"
    mapped: list[str] = field(default_factory=list)


@dataclass(slots=True)
class _CellStyle:
    parent: str
    data: str


class OdsStyles:
    """Collects styles while the XML is read; ``odd`` and ``is_hidden`` answer by the name of a style."""

    def __init__(self) -> None:
        self._data: dict[str, _DataStyle] = {}
        self._cells: dict[str, _CellStyle] = {}
        self._hidden: set[str] = set()
        self._open: _DataStyle | None = None
        self._table = ""
        self._known: dict[str, OddCell | None] = {}

    def start(self, name: str, attributes: dict[str, str]) -> None:
        """An element begins."""
        style = attributes.get("style:name", "")
        if name in _DATA_STYLES:
            self._open = self._data[style] = _DataStyle(name)
        elif name == "style:style" and attributes.get("style:family") == "table-cell":
            self._cells[style] = _CellStyle(
                attributes.get("style:parent-style-name", ""), attributes.get("style:data-style-name", "")
            )
        elif name == "style:style":
            self._table = style
        elif name == "style:table-properties" and attributes.get("table:display") == "false":
            self._hidden.add(self._table)
        elif self._open is not None:
            self._part(self._open, name, attributes)

    def text(self, name: str, text: str) -> None:
        """Text inside an element of a data style."""
        if self._open is not None and name == "number:text":
            self._open.text.append(text)
        elif self._open is not None and name == "number:currency-symbol":
            self._open.symbol += text

    def end(self, name: str) -> None:
        """An element ends."""
        if name in _DATA_STYLES:
            self._open = None

    def is_hidden(self, table_style: str) -> bool:
        """Whether sheets of this style are not shown."""
        return table_style in self._hidden

    def odd(self, style: str) -> OddCell | None:
        """The oddity of numbers in a cell style; None for plain ones and for styles that are not there."""
        if style not in self._known:
            self._known[style] = self._odd(self._data_style(style), 0)
        return self._known[style]

    def _part(self, style: _DataStyle, name: str, attributes: dict[str, str]) -> None:
        if name == "number:number":
            style.factor = attributes.get("number:display-factor", "1")
        elif name == "style:map":
            style.mapped.append(attributes.get("style:apply-style-name", ""))

    def _data_style(self, style: str) -> str:
        for _ in range(20):  # parents of parents; a ring of them ends here
            found = self._cells.get(style)
            if found is None:
                return ""
            if found.data:
                return found.data
            style = found.parent
        return ""

    def _odd(self, data: str, depth: int) -> OddCell | None:
        style = self._data.get(data)
        if style is None or depth > 3:
            return None
        text = " ".join("".join(style.text).replace("\u00a0", " ").split()).strip("()-+ ")
        own: OddCell | None = None
        if style.kind in _KINDS:
            own = OddCell(_KINDS[style.kind], f"style {data}", text.strip("% "))
        elif style.factor not in ("", "1", "1.0"):
            own = OddCell(OddKind.SCALED, f"display factor {style.factor}", text)
        elif style.kind == "number:currency-style":
            own = OddCell(OddKind.UNIT_FORMAT, f"style {data}", style.symbol or "currency")
        elif text and style.kind == "number:number-style":
            own = OddCell(OddKind.UNIT_FORMAT, f"style {data}", text)
        return own or next((odd for one in style.mapped if (odd := self._odd(one, depth + 1))), None)
