"""Where the uncertainty of a kit comes from: the kits that its references are of, and what two of these share."""

from collections.abc import Sequence
from dataclasses import dataclass

from stdfit.validity.kit import Ancestor, Kit


@dataclass(frozen=True, slots=True, eq=False)
class Origin:
    """A kit whose standards serve as references.

    Attributes
    ----------
    kit : Kit
    sha256 : str
        Of its file.
    """

    kit: Kit
    sha256: str

    @property
    def roots(self) -> frozenset[str]:
        """What may put the same error into it and into another: itself, its ancestors and its readings."""
        ancestors = (one.sha256 for one in self.kit.ancestors)
        readings = (one.sha256 for one in self.kit.files)
        return frozenset((self.sha256, *ancestors, *readings))


def distinct(origins: Sequence[Origin]) -> list[Origin]:
    """Return each kit once, in the order in which they come."""
    return list({one.sha256: one for one in origins}.values())


def ancestors_by(origins: Sequence[Origin]) -> tuple[Ancestor, ...]:
    """Return the ancestors of a kit whose references are of these kits, each before its own.

    Parameters
    ----------
    origins : sequence of Origin
        Each kit once.
    """
    ancestors = []
    for one in origins:
        ancestors.append(Ancestor(one.kit.name, one.kit.created, one.sha256))
        ancestors += [
            Ancestor(old.name, old.created, old.sha256, old.of or one.sha256) for old in one.kit.ancestors
        ]
    return tuple(ancestors)


def related(origins: Sequence[Origin]) -> list[list[Origin]]:
    """Return the kits in groups: two of a group have an ancestor, readings, or a chain of such kits in common.

    How the errors of two kits of a group go together is not known.
    """
    groups: list[list[Origin]] = []
    for one in origins:
        near = [group for group in groups if any(one.roots & other.roots for other in group)]
        groups = [group for group in groups if group not in near]
        groups.append([*(other for group in near for other in group), one])
    return groups
