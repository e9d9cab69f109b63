"""Ancestors of a kit, and kits that share one."""

from dataclasses import replace

import pytest

from stdfit.validity.ancestry import Origin, ancestors_by, distinct, related
from stdfit.validity.kit import Ancestor, SourceFile

A, B, C, D = (letter * 64 for letter in "abcd")


@pytest.fixture
def origin(usual_kit):
    """Return a function that makes an origin of a name with ancestors and readings."""

    def make(sha256, ancestors=(), readings=()):
        files = tuple(SourceFile("open", one, one) for one in readings)
        return Origin(
            replace(usual_kit, name=f"kit {sha256[0]}", ancestors=tuple(ancestors), files=files), sha256
        )

    return make


def test_each_kit_counts_once(origin):
    assert [one.sha256 for one in distinct([origin(B), origin(A), origin(B)])] == [B, A]


def test_ancestors_are_carried_along_and_say_whose_they_are(origin):
    grandchild = origin(C, [Ancestor("kit b", "2000-01-01", B), Ancestor("kit a", "1999-01-01", A, B)])
    own = ancestors_by([grandchild, origin(D)])
    assert [(one.name, one.sha256, one.of) for one in own] == [
        ("kit c", C, ""),
        ("kit b", B, C),
        ("kit a", A, B),
        ("kit d", D, ""),
    ]


def grouped(origins):
    return sorted(sorted(one.sha256[0] for one in group) for group in related(origins))


def test_kits_without_anything_in_common_are_alone(origin):
    assert grouped([origin(A), origin(B, readings=["1"]), origin(C, readings=["2"])]) == [["a"], ["b"], ["c"]]


def test_a_common_ancestor_relates(origin):
    assert grouped([origin(A, [Ancestor("d", "", D)]), origin(B, [Ancestor("d", "", D)]), origin(C)]) == [
        ["a", "b"],
        ["c"],
    ]


def test_an_ancestor_beside_its_descendant_relates(origin):
    assert grouped([origin(A), origin(B, [Ancestor("a", "", A)])]) == [["a", "b"]]


def test_common_readings_relate_and_chains_join(origin):
    assert grouped(
        [origin(A, readings=["1"]), origin(C, readings=["2"]), origin(B, readings=["1", "2"]), origin(D)]
    ) == [["a", "b", "c"], ["d"]]
