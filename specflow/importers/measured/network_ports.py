"""The ports of a network by name: which is the input, which the outputs; by a person, a mapping or the comments."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

_INPUT = re.compile(r"^(?:the )?(?:rf[ _-]*)?(?:in|input)(?:[ _-]*port)?$", re.IGNORECASE)
_INPUTS = re.compile(r"^(?:rf[ _-]*)?(?:in|input)[ _-]*\d*(?:[ _-]*port)?$", re.IGNORECASE)
_OUTPUTS = re.compile(r"^(?:rf[ _-]*)?(?:out|output)[ _-]*(?:\d+|[A-Za-z])?(?:[ _-]*port)?$", re.IGNORECASE)
_PORT = re.compile(r"^port[ _-]*(?P<number>\d+)$", re.IGNORECASE)
_WAY = re.compile(r"^(?:from )?(?P<start>.+?)\s+to\s+(?P<end>.+)$", re.IGNORECASE)

KEY = re.compile(r"^port[ _-]*(?P<number>\d+)$", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Ports:
    """Names of the ports in order ("" where nobody named one), and who named each."""

    names: tuple[str, ...]
    by: tuple[str, ...]

    def inputs(self) -> list[int]:
        """The ports (from 0) that are inputs by their names."""
        return [place for place, name in enumerate(self.names) if _INPUTS.match(name)]

    def outputs(self) -> list[int]:
        """The ports that are outputs."""
        return [place for place, name in enumerate(self.names) if _OUTPUTS.match(name)]

    def find(self, text: str) -> list[int]:
        """The ports that a plane or a person means: "input", "output", "port 3", or a name that was given."""
        plain = _plain(text)
        named = [place for place, name in enumerate(self.names) if name and _plain(name) == plain]
        if named:
            return named
        numbered = _PORT.match(text.strip())
        if numbered:
            number = int(numbered["number"])
            return [number - 1] if 1 <= number <= len(self.names) else []
        if _INPUT.match(text.strip()):
            return self.inputs()
        if re.fullmatch(r"(?:the )?(?:rf )?(?:out|output)(?: port)?", text.strip(), re.IGNORECASE):
            return self.outputs()
        return []

    def way(self, text: str) -> tuple[list[int], list[int]] | None:
        """The ports at both ends of "input to output", None where the text is no way."""
        found = _WAY.match(text.strip())
        return (self.find(found["start"]), self.find(found["end"])) if found else None

    def shown(self) -> str:
        """Say the names: "port 1 input, port 2 output"."""
        return ", ".join(f"port {place + 1} {name}" for place, name in enumerate(self.names) if name)

    def needed(self) -> str:
        """What a person has to say."""
        rest = " ".join(f'--state "port {place + 1}=..."' for place in range(min(len(self.names), 4)))
        return f"say which port is what (input, output, or a name that a requirement uses): {rest}"


def named_ports(
    count: int,
    person: Mapping[str, str],
    mapping: Mapping[str, str],
    file: Sequence[str],
    by_file: str,
) -> Ports:
    """Bring the names of ports together: the person has the last word, then the mapping, then the file."""
    names, by = [""] * count, [""] * count
    for place in range(count):
        for said, who in ((person, "stated by the person"), (mapping, "stated by the mapping")):
            text = next((value for key, value in said.items() if _number(key) == place + 1), "").strip()
            if text not in ("", "?") and not names[place]:  # a proposed mapping has "?" for what nobody named
                names[place], by[place] = text, who
        if not names[place] and place < len(file) and file[place]:
            names[place], by[place] = file[place], by_file
    return Ports(tuple(names), tuple(by))


def unknown_ports(count: int, *said: Mapping[str, str]) -> list[str]:
    """Return the keys that name a port which the network does not have."""
    numbers = {key: _number(key) for one in said for key in one}
    return [key for key, number in numbers.items() if number is not None and not 1 <= number <= count]


def _number(key: str) -> int | None:
    match = KEY.match(key.strip())
    return int(match["number"]) if match else None


def _plain(text: str) -> str:
    return re.sub(r"[\s_./-]+", "", text.casefold()).removesuffix("port")
