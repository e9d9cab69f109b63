"""What stands above the numbers of a Touchstone file: option line and version 2 keywords."""

import re
from dataclasses import dataclass, field
from math import isfinite

from stdfit.base.errors import ReadingError
from stdfit.data.words import quoted, suggestion

UNITS = {"HZ": 1.0, "KHZ": 1e3, "MHZ": 1e6, "GHZ": 1e9}
PARAMETERS = ("S", "Z", "Y", "G", "H")
FORMATS = ("RI", "MA", "DB")
KEYWORDS = (
    "Version",
    "Number of Ports",
    "Two-Port Data Order",
    "Two-Port Order",
    "Number of Frequencies",
    "Number of Noise Frequencies",
    "Reference",
    "Matrix Format",
    "Mixed-Mode Order",
    "Begin Information",
    "End Information",
    "Network Data",
    "Noise Data",
    "End",
)
_LINES = re.compile(rb"([^\r\n]*)(\r\n|\r|\n|\Z)")
_LATER_OPTIONS = re.compile(rb"[\r\n][ \t]*#([^\r\n]*)")
_OPTIONS = ("unit", "parameter", "number_format", "reference_ohm")
_KEYWORD = re.compile(r"\[\s*([^\]]*?)\s*\](.*)\Z")
_EXAMPLE = "give an option line such as '# Hz S RI R 50' above the numbers"


@dataclass(slots=True, eq=False)
class Header:
    """What the numbers mean, and where they begin. Defaults are the standard's: GHz S MA R 50."""

    name: str
    version: int = 1
    unit: float = 1e9
    parameter: str = "S"
    number_format: str = "MA"
    reference_ohm: list[float] = field(default_factory=lambda: [50.0])
    ports: int | None = None
    points: int | None = None
    matrix: str = "FULL"
    start: int = 0
    first_line: int = 1

    def refuse(self, line: int, what: str, mend: str) -> ReadingError:
        """Return an error at a line of this file."""
        return ReadingError(what, mend, file=self.name, line=line)


def parse_header(text: bytes, name: str) -> Header:
    """Return what stands above the numbers.

    Parameters
    ----------
    text : bytes
        The whole file as plain ASCII.
    name : str
        The file's name, for messages.

    Raises
    ------
    ReadingError
        No option line, an unknown word in it, an unknown or faulty keyword, or no numbers.

    Notes
    -----
    Touchstone File Format Specification 1.1 (2002) and 2.0 (2009), IBIS Open Forum.
    """
    header = Header(name)
    options = False
    comment_until_end = False
    references_missing = 0
    for number, match in enumerate(_LINES.finditer(text), start=1):
        line = match[1].decode("ascii").partition("!")[0].strip()
        keyword = _KEYWORD.match(line)
        if comment_until_end:
            comment_until_end = not (keyword and _plain(keyword[1]) == "end information")
        elif not line:
            continue
        elif line.startswith("#"):
            if not options:
                _read_options(header, line[1:], number)
            options = True
        elif keyword:
            word = _plain(keyword[1])
            if word == "begin information":
                comment_until_end = True
            elif word == "network data":
                _check_complete(header, number, options, references_missing)
                header.start, header.first_line = match.end(), number + 1
                return header
            elif word == "reference":
                header.reference_ohm = _resistances(header, keyword[2].split(), number)
                references_missing = (header.ports or 1) - len(header.reference_ohm)
            else:
                _read_keyword(header, word, keyword[1], keyword[2].strip(), number)
        elif references_missing > 0:
            header.reference_ohm += _resistances(header, line.split(), number)
            references_missing = (header.ports or 1) - len(header.reference_ohm)
        elif header.version == 2:
            raise header.refuse(
                number, f"{quoted(line)} stands before [Network Data]", "put [Network Data] above the numbers"
            )
        elif not options:
            raise header.refuse(number, "the numbers begin without an option line", _EXAMPLE)
        else:
            header.start, header.first_line = match.start(), number
            return header
    if not options:
        raise ReadingError("no option line was found", _EXAMPLE, file=name)
    raise ReadingError("the file holds no numbers", "export the readings again", file=name)


def another_option_line(header: Header, text: bytes) -> bool:
    """Tell whether an option line among the numbers of version 1 says something else than the first one.

    Two files that were joined look like this. The format lets the first line count, and nobody would notice.
    """
    if header.version != 1 or text.find(b"#", header.start) < 0:
        return False
    for match in _LATER_OPTIONS.finditer(text, header.start):
        other = Header(header.name)
        try:
            _read_options(other, match[1].decode("ascii").partition("!")[0], 0)
        except ReadingError:
            return True
        if any(getattr(other, name) != getattr(header, name) for name in _OPTIONS):
            return True
    return False


def _read_options(header: Header, text: str, number: int) -> None:
    """Read the items of an option line, in any order and any case."""
    words = re.sub(r"(?i)\bR(?=[\d.])", "R ", text).split()
    seen: set[str] = set()
    while words:
        word = words.pop(0)
        upper = word.upper()
        if upper in UNITS:
            kind, header.unit = "unit", UNITS[upper]
        elif upper in PARAMETERS:
            kind, header.parameter = "parameter", upper
        elif upper in FORMATS:
            kind, header.number_format = "number format", upper
        elif upper == "R":
            kind = "reference resistance"
            values = []
            while words and not words[0].isalpha():
                values.append(words.pop(0))
            if len(values) != 1:
                raise header.refuse(
                    number,
                    f"'R' is followed by {len(values)} values, and it takes one resistance",
                    "write for example 'R 50'; a resistance for each port needs [Reference] of version 2",
                )
            header.reference_ohm = _resistances(header, values, number)
        else:
            known = [*("Hz", "kHz", "MHz", "GHz"), *PARAMETERS, *FORMATS, "R"]
            raise header.refuse(
                number, f"the option line has the unknown word {quoted(word)}", suggestion(word, known)
            )
        if kind in seen:
            raise header.refuse(number, f"the option line states the {kind} twice", "leave one of the two")
        seen.add(kind)
    if header.parameter in ("G", "H"):
        raise header.refuse(
            number, f"the file holds {header.parameter} parameters", "export S parameters (or Z or Y)"
        )


def _read_keyword(header: Header, word: str, written: str, value: str, number: int) -> None:
    """Read one version 2 keyword that is not [Reference], [Network Data] or an information block."""
    if word == "version":
        if value not in ("2.0", "2.1"):
            raise header.refuse(
                number, f"[Version] is {quoted(value)}", "only versions 2.0 and 2.1 are known"
            )
        header.version = 2
    elif word == "number of ports":
        header.ports = _count(header, written, value, number)
        if header.ports > 2:
            raise header.refuse(
                number,
                f"the file holds {header.ports} ports",
                "export the one port (or two ports) with the standard",
            )
    elif word == "number of frequencies":
        header.points = _count(header, written, value, number)
    elif word in ("two-port data order", "two-port order"):
        # The order of S12 and S21 does not matter here: only their product is ever used.
        if value not in ("12_21", "21_12"):
            raise header.refuse(number, f"[{written}] is {quoted(value)}", "write 12_21 or 21_12")
    elif word == "matrix format":
        if value.upper() not in ("FULL", "LOWER", "UPPER"):
            raise header.refuse(number, f"[{written}] is {quoted(value)}", "write Full, Lower or Upper")
        header.matrix = value.upper()
    elif word == "mixed-mode order":
        raise header.refuse(
            number, "the file holds mixed-mode parameters", "export single-ended S parameters"
        )
    elif word != "number of noise frequencies":
        raise header.refuse(
            number, f"unknown keyword {quoted(f'[{written}]')}", suggestion(written, KEYWORDS)
        )


def _check_complete(header: Header, number: int, options: bool, references_missing: int) -> None:
    """Refuse a version 2 header that lacks what the numbers need."""
    if not options:
        raise header.refuse(number, "the numbers begin without an option line", _EXAMPLE)
    if header.version != 2:
        raise header.refuse(
            number, "[Network Data] in a file without [Version]", "put '[Version] 2.0' on the first line"
        )
    if header.ports is None:
        raise header.refuse(
            number, "[Number of Ports] is missing", "put '[Number of Ports] 1' above the numbers"
        )
    wanted = header.ports
    if references_missing > 0 or len(header.reference_ohm) not in (1, wanted):
        raise header.refuse(
            number,
            f"[Reference] has {len(header.reference_ohm)} of {wanted} values",
            "give one resistance a port",
        )


def _resistances(header: Header, words: list[str], number: int) -> list[float]:
    """Return resistances in ohms; each must be a positive number."""
    values = []
    for word in words:
        try:
            value = float(word)
        except ValueError:
            value = float("nan")
        if not (isfinite(value) and value > 0 and word.isascii() and "_" not in word):
            raise header.refuse(
                number,
                f"the reference resistance {quoted(word)} is not a positive number",
                "write for example 50",
            )
        values.append(value)
    return values


def _count(header: Header, word: str, value: str, number: int) -> int:
    """Return a positive whole number."""
    if not re.fullmatch(r"[0-9]{1,9}", value) or int(value) == 0:
        raise header.refuse(
            number, f"[{word}] is {quoted(value)}, not a positive whole number", "mend the count"
        )
    return int(value)


def _plain(keyword: str) -> str:
    """A keyword in lower case with single spaces."""
    return " ".join(keyword.lower().split())
