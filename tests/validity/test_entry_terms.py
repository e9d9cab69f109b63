"""Words for what is accepted and with how many digits."""

import pytest

from stdfit.base.errors import RequestError
from stdfit.circuits.standard import PARAMETERS
from stdfit.validity.entry.terms import accepted_places, digits_of, terms_of


@pytest.fixture(scope="module")
def kit(by_hand):
    return by_hand({}, {"stub": ("open", [20.0, 1.0, 50.0, 40.0, 0.0, 0.0, 0.0])})


def terms(kit, *words):
    return {
        one.name: [terms_of(one.kind)[place] for place in accepted_places(words, kit)[one.name]]
        for one in kit.definitions
    }


def test_no_words_mean_everything(kit):
    places = accepted_places(None, kit)
    assert {name: len(own) for name, own in places.items()} == {"open": 7, "short": 7, "load": 6, "stub": 7}


def test_a_term_holds_for_all_that_have_it(kit):
    assert terms(kit, "delay", "C0", "resistance") == {
        "open": ["delay", "c0"],
        "short": ["delay"],
        "load": ["delay", "resistance"],
        "stub": ["delay", "c0"],
    }


def test_nothing_and_cubic(kit):
    assert terms(kit, "nothing") == {"open": [], "short": [], "load": [], "stub": []}
    found = terms(kit, "cubic")
    assert (found["open"], found["short"], found["load"]) == (
        ["c0", "c1", "c2", "c3"],
        ["l0", "l1", "l2", "l3"],
        [],
    )


def test_prefixes_name_a_kind_or_a_standard(kit):
    found = terms(kit, "stub.delay", "load.resistance", "short.cubic")
    assert found == {
        "open": [],
        "short": ["l0", "l1", "l2", "l3"],
        "load": ["resistance"],
        "stub": ["delay"],
    }
    assert terms(kit, "open.z0")["stub"] == ["z0"]


def test_every_parameter_can_be_named(kit):
    for one in kit.definitions:
        assert terms(kit, *terms_of(one.kind))[one.name] == list(terms_of(one.kind))
        assert len(set(terms_of(one.kind))) == len(PARAMETERS[one.kind])


@pytest.mark.parametrize(
    ("words", "what", "mend"),
    [
        (["dealy"], "there is no term 'dealy'", "did you mean 'delay'?"),
        (["qqqq"], "there is no term 'qqqq'", "use one of: delay, loss, z0, c0"),
        (["open.nothing"], "there is no term 'open.nothing'", "did you mean 'nothing'?"),
        (["nothing", "delay"], "'nothing' stands beside other terms", "leave it out"),
        (["load.c0"], "a load has no c0", "it has: delay, loss, z0, resistance"),
        (["open.l0"], "an open has no l0", "it has: delay"),
        (["stab.delay"], "no kind and no standard 'stab'", "did you mean 'stub'?"),
        ([""], "there is no term ''", "use one of"),
    ],
)
def test_terms_that_are_refused(kit, words, what, mend):
    with pytest.raises(RequestError) as refused:
        accepted_places(words, kit)
    assert refused.value.what == what
    assert mend in refused.value.mend


def test_digits(kit):
    found = digits_of(["resistance=5", "3", "stub.cubic=2"], kit)
    assert found["load"] == (3, 3, 3, 5, 3, 3)
    assert found["stub"] == (3, 3, 3, 2, 2, 2, 2)
    assert found["open"] == (3,) * 7
    assert digits_of([], kit)["short"] == (4,) * 7


@pytest.mark.parametrize("word", ["0", "13", "-1", "3.5", "x", "", "resistance=", "²", "9" * 400])
def test_digits_that_are_refused(kit, word):
    with pytest.raises(RequestError, match="is no number of significant digits"):
        digits_of([word], kit)


def test_digits_of_what_there_is_not(kit):
    with pytest.raises(RequestError, match="there is no term 'resistence'") as refused:
        digits_of(["resistence=5"], kit)
    assert refused.value.mend == "did you mean 'resistance'?"
