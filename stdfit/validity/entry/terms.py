"""Which terms of a definition are accepted, and with how many digits: words of the user, for each standard of a kit."""

from collections.abc import Iterable, Sequence

from stdfit.base.errors import RequestError
from stdfit.circuits.standard import PARAMETERS, Parameter
from stdfit.data.words import quoted, suggestion
from stdfit.validity.kit import Definition, Kit

NOTHING, CUBIC = "nothing", "cubic"

DIGITS = 4
"""Significant digits where none are asked for."""

MOST_DIGITS = 12


def term_of(parameter: Parameter) -> str:
    """Return the word for a parameter.

    Examples
    --------
    >>> [term_of(one) for one in PARAMETERS["load"]]
    ['delay', 'loss', 'z0', 'resistance', 'inductance', 'capacitance']
    """
    return parameter.name.removeprefix("offset_").partition("_")[0]


def terms_of(kind: str) -> tuple[str, ...]:
    """Return the words of a kind, in the order of its parameters."""
    return tuple(term_of(one) for one in PARAMETERS[kind])


def default_of(parameter: Parameter, reference_ohm: float) -> float:
    """Return what stands for a term that is not accepted: the reference impedance, or 0."""
    return reference_ohm if parameter.unit == "Ω" else 0.0


def accepted_places(words: Sequence[str] | None, kit: Kit) -> dict[str, tuple[int, ...]]:
    """Return, for each standard, the places of its accepted parameters; all of them where no words are given.

    A word is a term, "cubic" for C0 to C3 and L0 to L3, or "nothing"; "open.delay" accepts a term for a kind or a
    standard of that name alone.

    Raises
    ------
    RequestError
        An unknown word, a term that no standard meant has, or "nothing" beside a term.
    """
    if words is None:
        return {one.name: tuple(range(len(PARAMETERS[one.kind]))) for one in kit.definitions}
    if NOTHING in words and len(words) > 1:
        raise RequestError("'nothing' stands beside other terms", "leave it out, or the others")
    places: dict[str, set[int]] = {one.name: set() for one in kit.definitions}
    for word in words:
        for definition, term in _meant(word, kit, (NOTHING, CUBIC)):
            places[definition.name] |= set(_places(definition.kind, term))
    return {name: tuple(sorted(own)) for name, own in places.items()}


def digits_of(words: Sequence[str], kit: Kit) -> dict[str, tuple[int, ...]]:
    """Return, for each standard, the significant digits of its parameters.

    A word is a number for all terms, or "term=number"; a later word overrules an earlier one.

    Raises
    ------
    RequestError
        An unknown term, or no whole number from 1 to `MOST_DIGITS`.
    """
    digits = {one.name: [DIGITS] * len(PARAMETERS[one.kind]) for one in kit.definitions}
    for word in sorted(words, key=lambda word: "=" in word):
        term, equals, number = word.rpartition("=")
        count = _count(number)
        meant = _meant(term, kit, (CUBIC,)) if equals else [(one, "") for one in kit.definitions]
        for definition, own in meant:
            for place in _places(definition.kind, own) if own else range(len(PARAMETERS[definition.kind])):
                digits[definition.name][place] = count
    return {name: tuple(own) for name, own in digits.items()}


def _count(number: str) -> int:
    if number.isascii() and number.isdigit() and len(number) < 4 and 1 <= int(number) <= MOST_DIGITS:
        return int(number)
    raise RequestError(
        f"{quoted(number)} is no number of significant digits",
        f"write a whole number from 1 to {MOST_DIGITS}, or resistance=5",
    )


def _places(kind: str, term: str) -> list[int]:
    """Return the places that a term stands for; none where the kind has no such term."""
    terms = terms_of(kind)
    if term == CUBIC:
        return [k for k, one in enumerate(PARAMETERS[kind]) if _of_a_cubic(one)]
    return [k for k, one in enumerate(terms) if one == term]


def _of_a_cubic(parameter: Parameter) -> bool:
    return parameter.name[:1] in "cl" and parameter.name[1:].isdigit()


def _meant(word: str, kit: Kit, more: Iterable[str]) -> list[tuple[Definition, str]]:
    """Return the standards that a word means, and the term.

    Raises
    ------
    RequestError
        An unknown term, an unknown prefix, or a term that the standards with this prefix do not have.
    """
    prefix, dot, term = word.rpartition(".")
    term = term.lower()
    known = [*dict.fromkeys(own for kind in PARAMETERS for own in terms_of(kind)), *more]
    if term not in known or (dot and term == NOTHING):
        raise RequestError(f"there is no term {quoted(word)}", suggestion(term, known))
    if not dot:
        return [(one, term) for one in kit.definitions]
    meant = [one for one in kit.definitions if prefix in (one.name, one.kind)]
    if not meant and prefix not in PARAMETERS:
        names = [*PARAMETERS, *(one.name for one in kit.definitions)]
        raise RequestError(
            f"no kind and no standard {quoted(prefix)}", suggestion(prefix, dict.fromkeys(names))
        )
    kinds = {one.kind for one in meant} or {prefix}
    for kind in sorted(kinds):
        if not _places(kind, term):
            raise RequestError(f"{_a(kind)} has no {term}", f"it has: {', '.join(terms_of(kind))}")
    return [(one, term) for one in meant]


def _a(kind: str) -> str:
    return f"an {kind}" if kind[:1] in "aeiou" else f"a {kind}"
