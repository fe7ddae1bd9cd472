"""Which cell styles of a workbook show a number otherwise than it is."""

from __future__ import annotations

from dataclasses import dataclass
from xml.etree.ElementTree import Element

from specflow.importers.readers.number_format import odd_format
from specflow.importers.readers.odd_cells import OddCell


@dataclass(frozen=True, slots=True)
class Styles:
    """``odd[s]`` is the oddity of numbers in style ``s``. ``never_calculated`` says that the workbook was written by a
    program that leaves the calculation to whoever opens it, so that a stored 0 is no result. ``from_1904`` says that
    days are counted from 1904 on, not from 1900."""

    odd: tuple[OddCell | None, ...] = ()
    never_calculated: bool = False
    from_1904: bool = False

    def of(self, style: int) -> OddCell | None:
        """The oddity of numbers in this style; unknown styles are plain."""
        return self.odd[style] if 0 <= style < len(self.odd) else None


def read_styles(root: Element | None, never_calculated: bool, from_1904: bool = False) -> Styles:
    """The styles of ``styles.xml`` (None: the workbook has none)."""
    if root is None:
        return Styles((), never_calculated, from_1904)
    codes = {
        _number(element, "numFmtId"): element.get("formatCode", "") for element in children(root, "numFmts")
    }
    formats = [_number(element, "numFmtId") for element in children(root, "cellXfs")]
    known = {number: odd_format(number, codes.get(number)) for number in set(formats)}
    return Styles(tuple(known[number] for number in formats), never_calculated, from_1904)


def children(root: Element, parent: str) -> list[Element]:
    """The children of the first element called ``parent`` below ``root``, whatever its namespace."""
    return next((list(element) for element in root if local_name(element) == parent), [])


def local_name(element: Element) -> str:
    """The name of an element without its namespace (transitional and strict files differ in it)."""
    return element.tag.rpartition("}")[2]


def _number(element: Element, attribute: str) -> int:
    text = element.get(attribute, "0")
    return int(text) if text.isascii() and text.isdigit() and len(text) < 10 else 0
