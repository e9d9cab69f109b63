"""What stands on a report page: words and formatted figures, ready to be set."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Table:
    """A table of words.

    Attributes
    ----------
    caption : str
    head : tuple of str
    rows : tuple of rows, each as long as `head`
        The first cell of each row heads it.
    note : str
        What is to be said of it; empty for nothing.
    flows : bool
        Whether cells hold whole phrases: on a narrow screen each row becomes a block.
    """

    caption: str
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    note: str = ""
    flows: bool = False


@dataclass(frozen=True, slots=True)
class Reach:
    """How far one standard is good.

    Attributes
    ----------
    name, limit, reason : str
    start, read, good : float
        Where its readings begin, how far they reach, and how far it is good, in percent of the page's frequency scale.
    ends_it : bool
        Whether the kit ends with it.
    """

    name: str
    limit: str
    reason: str
    start: float
    read: float
    good: float
    ends_it: bool


@dataclass(frozen=True, slots=True)
class Answer:
    """What a reader came for.

    Attributes
    ----------
    figure : str
        The limit, with its unit; empty where the kit is good nowhere.
    from_where : str
        "from 1 GHz", where the readings begin so high that it matters; else empty.
    within : str
        The tolerance.
    reason, gloss : str
        Why the kit ends there, and what these words mean.
    standards : tuple of Reach
    scale : str
        The frequency at which the scale of `standards` ends.
    step, reach : str
        The best thing to do next and how far it would reach; empty where nothing is known.
    verdict : str
        As the command prints it.
    """

    figure: str
    from_where: str
    within: str
    reason: str
    gloss: str
    standards: tuple[Reach, ...]
    scale: str
    step: str
    reach: str
    verdict: str


@dataclass(frozen=True, slots=True)
class Term:
    """One number to type.

    Attributes
    ----------
    label, number, unit : str
    half : str
        Its 95 % uncertainty; empty where it has none.
    zero : bool
        Whether it is 0 and was not fitted.
    """

    label: str
    number: str
    half: str
    unit: str
    zero: bool


@dataclass(frozen=True, slots=True)
class Typing:
    """The numbers of one standard in the order in which they are typed, and the sums that the readings fix."""

    name: str
    kind: str
    terms: tuple[Term, ...]
    sums: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Figure:
    """A picture with its words; `svg` is a whole element that carries its alternative text."""

    name: str
    title: str
    caption: str
    svg: str


@dataclass(frozen=True, slots=True)
class StandardPart:
    """The evidence of one standard.

    Attributes
    ----------
    name, anchor : str
    facts : tuple of (what, value)
    figures : tuple of Figure
    last : Figure or None
        One more, to stand beside the tables, so that no row of pictures has a hole.
    budget, orders : Table or None
    notes : tuple of str
    """

    name: str
    anchor: str
    facts: tuple[tuple[str, str], ...]
    figures: tuple[Figure, ...]
    last: Figure | None
    budget: Table | None
    orders: Table | None
    notes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Page:
    """A whole page.

    Attributes
    ----------
    title, name, about : str
        `about` tells connector, reference impedance and when the standards were read.
    answer : Answer
    warnings : tuple of str
        Those that stand near the top.
    more_warnings : tuple of str
        Those for which there is no room there.
    warning_count : str
        How many there are in all, with the noun.
    typing : tuple of Typing
    bounds : tuple of Table
        How sure: bounds over frequency, of single values, of sums; the ladder.
    device_note : str
    devices : tuple of Table
        What the kit does to devices; empty where it does not hold three standards.
    ideal : str
        What ideal standards would cost; empty likewise.
    steps : Table or None
        What would push the limit.
    no_steps : str
        Why nothing is said of that; empty where something is.
    figures : tuple of Figure
        Of the kit as a whole.
    readings_note : str
        Why there are no pictures of readings; empty where there are.
    orders_note : str
        What the names of orders mean; empty where none are told.
    standards : tuple of StandardPart
    record : tuple of Table
        Thru, references, source files.
    checks : tuple of str
    facts : tuple of (what, value)
    """

    title: str
    name: str
    about: str
    answer: Answer
    warnings: tuple[str, ...]
    more_warnings: tuple[str, ...]
    warning_count: str
    typing: tuple[Typing, ...]
    bounds: tuple[Table, ...]
    device_note: str
    devices: tuple[Table, ...]
    ideal: str
    steps: Table | None
    no_steps: str
    figures: tuple[Figure, ...]
    readings_note: str
    orders_note: str
    standards: tuple[StandardPart, ...]
    record: tuple[Table, ...]
    checks: tuple[str, ...]
    facts: tuple[tuple[str, str], ...]
