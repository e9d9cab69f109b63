"""The entry sheet: its promise of the extra error, the limits left, and the kit as it is typed."""

import re
from dataclasses import replace

import numpy as np
import pytest
from typed_kit import typed_kit

from stdfit.base.errors import RequestError
from stdfit.circuits.standard import PARAMETERS, reflection
from stdfit.uncertainty.budget import Share
from stdfit.validity.entry.error import distance, largest_distance, rounded_up, stated
from stdfit.validity.entry.kept import held
from stdfit.validity.entry.sheet import Wanted, entry_sheet, ideal_cost
from stdfit.validity.entry.terms import terms_of
from stdfit.validity.entry.units import nearest_number, units_from
from stdfit.validity.kit import Definition, Kit, curve
from stdfit.validity.limit import Limit
from stdfit.validity.limits import limits

UNITS = (
    [],
    ["loss=dB"],
    ["delay=two-way-mm", "capacitance=fF", "inductance=nH"],
    ["delay=ns", "capacitance=F", "inductance=H", "loss=two-way-dB"],
)
SIZE = {
    "offset_delay_ps": 60.0,
    "offset_loss_gohm_per_s": 3.0,
    "offset_z0_ohm": 2.0,
    "resistance_ohm": 1.0,
    "inductance_ph": 150.0,
    "capacitance_ff": 40.0,
}


def random_kit(rng):
    """A kit of one standard; invented, three quarters of its parameters in use."""
    kind = ("open", "short", "load")[rng.integers(3)]
    low, top = 10.0 ** rng.uniform(6, 8), rng.uniform(2e9, 18e9)
    values = []
    for one in PARAMETERS[kind]:
        at_top = (30e-15 if one.name.startswith("c") else 30e-12) / (one.si * top**one.power)
        value = rng.normal() * SIZE.get(one.name, at_top) if rng.random() < 0.75 else 0.0
        value = abs(value) if one.name == "offset_loss_gohm_per_s" else value
        values.append(value + (50.0 if one.unit == "Ω" else 0.0))
    grid = np.sort([low, top, *rng.uniform(low, top, 6)])
    bound = 0.002 + 0.02 * (grid / top) * rng.uniform(0.2, 1.5)
    limit = Limit(0.02, top, "the readings end here")
    only = Definition(
        *("only", kind, "full", 3, low, top, low, top * rng.uniform(0.6, 1.0)),
        *(held(kind, np.array(values)), (), grid, bound, limit, ()),
    )
    return Kit("Drawn", "", 50.0, 0.02, np.inf, "", "", limit, (only,), (), (), (), (), ())


def test_no_other_grid_exceeds_the_stated_extra_error():
    """120 random kits, three digits, every kind of accepted subset and of units."""
    rng = np.random.default_rng(12)
    closest, digits = 0.0, ("3",)
    for k in range(120):
        kit = random_kit(rng)
        (full,) = kit.definitions
        part = rng.choice([0.2, 0.5, 0.9])
        accepts = tuple(term for term in terms_of(full.kind) if rng.random() < part) or ("nothing",)
        sheet = entry_sheet(kit, Wanted(accepts, units_from(UNITS[k % 4], None), digits))
        (entry,) = sheet.entries
        grid = rng.uniform(entry.low_hz, entry.top_hz, 3000)
        found = distance(full.kind, full.values, entry.values, grid, 50.0).max()
        assert found <= entry.extra, (k, accepts)
        closest = max(closest, found / entry.extra)
        for one in entry.typed:
            assert nearest_number(float(one.text), 3) == float(one.text)
    assert closest > 0.99  # rounded up, and not more


def test_jointly_rounded_never_exceeds_plainly_rounded():
    """Everything accepted: the largest error is not above that of each full value rounded on its own."""
    rng = np.random.default_rng(13)
    gains = []
    for k in range(40):
        kit = random_kit(rng)
        (full,) = kit.definitions
        (entry,) = entry_sheet(kit, Wanted(digits=(str(2 + k % 3),))).entries
        plain = np.array([nearest_number(float(one), 2 + k % 3) for one in full.values])
        most, _ = largest_distance(full.kind, full.values, plain, entry.low_hz, entry.top_hz, 50.0)
        assert entry.extra <= stated(most)
        gains.append(entry.extra / stated(most) if most else 1.0)
    assert np.median(gains) < 0.2


@pytest.fixture(scope="module")
def kit(by_hand):
    return by_hand(
        {"directivity": {"open.c0": 4.0, "load.resistance_ohm": 0.3}, "tracking": {"short.l0": 8.0}},
        {
            "open": ("open", [18.2, 1.1, 50.0, 41.3, 0.0, 610.0, 0.0]),
            "short": ("short", [26.5, 3.0, 50.0, 0.4, 0.0, 0.0, 0.0]),
            "load": ("load", [0.0, 0.0, 50.0, 50.45, 35.0, 0.0]),
        },
        misfits={"open": (0.001, 0.004), "short": (0.001, 0.003), "load": (0.001, 0.012)},
    )


def entry_of(sheet, name):
    return next(one for one in sheet.entries if one.definition.name == name)


def numbers(entry):
    return {one.parameter.name: float(one.text) for one in entry.typed}


def test_everything_with_many_digits_costs_nothing(kit):
    sheet = entry_sheet(kit, Wanted(digits=("10",)))
    for entry in sheet.entries:
        assert entry.extra < 1e-9
        assert entry.left_out == ()
        np.testing.assert_allclose(list(numbers(entry).values()), entry.definition.values, rtol=1e-9)
    assert sheet.left.limit_hz == pytest.approx(sheet.before.limit_hz, rel=1e-6)
    assert sheet.left.reason == sheet.before.reason


def test_a_delay_alone(kit):
    sheet = entry_sheet(kit, Wanted(("delay",)))
    opened = entry_of(sheet, "open")
    assert list(numbers(opened)) == ["offset_delay_ps"]
    assert 20.0 < numbers(opened)["offset_delay_ps"] < 21.0  # 18.2 ps and 41.3 fF, 0.05 ps each
    assert [one.name for one in opened.left_out] == [
        *("offset_loss_gohm_per_s", "offset_z0_ohm", "c0", "c1", "c2", "c3"),
    ]
    assert opened.values.tolist()[1:] == [0.0, 50.0, 0.0, 0.0, 0.0, 0.0]
    assert 0.0 < opened.left.limit_hz < opened.before.limit_hz
    assert sheet.left.limit_hz == min(entry.left.limit_hz for entry in sheet.entries)


def test_what_the_full_definition_does_without_is_not_typed_for_next_to_nothing(kit):
    """A loss left out cannot be made up for by odd terms of a cubic: the least of two evils is to leave them alone."""
    sheet = entry_sheet(kit, Wanted(("delay", "cubic", "resistance", "inductance")))
    assert [one.text for one in entry_of(sheet, "open").typed][2::2] == ["0", "0"]
    assert abs(numbers(entry_of(sheet, "open"))["c0"] - 41.3) < 10.0


def test_nothing_accepted_are_ideal_standards(kit):
    sheet = entry_sheet(kit, Wanted(("nothing",)))
    for entry, ideal in zip(sheet.entries, (1.0, -1.0, 0.0), strict=True):
        assert entry.typed == ()
        gamma, _ = reflection(entry.definition.kind, entry.values, np.array([1e8, 5e9]), 50.0)
        np.testing.assert_allclose(gamma, ideal, atol=1e-12)
    for hertz, error, name in ideal_cost(sheet, [1e9, 3e9, 7e9]):
        gammas = {one.name: curve(kit, one, np.array([hertz]))[0][0] for one in kit.definitions}
        errors = {
            name: abs(gammas[name] - ideal) for name, ideal in (("open", 1), ("short", -1), ("load", 0))
        }
        assert (error, name) == (pytest.approx(max(errors.values())), max(errors, key=errors.get))
    assert len(ideal_cost(sheet, [1e9, 3e9, 7e9])) == 2


def test_loss_and_z0_of_no_line_have_no_effect(kit):
    sheet = entry_sheet(kit, Wanted(("loss", "z0", "c0"), units_from(["loss=dB"], None)))
    opened = entry_of(sheet, "open")
    assert numbers(opened)["offset_loss_gohm_per_s"] == 0.0
    assert numbers(opened)["offset_z0_ohm"] == 50.0
    assert opened.notes == (
        "offset loss has no effect without a delay: it stays at 0",
        "offset Z0 has no effect without a delay: it stays at the reference impedance",
    )
    everything = entry_of(entry_sheet(kit, Wanted()), "load")
    assert everything.notes == ()  # a load without a line has none to tell of


def test_negative_numbers_are_told():
    kit = random_kit(np.random.default_rng(0))
    (full,) = kit.definitions
    values = full.values.copy()
    values[0] = -20.0
    kit = replace(kit, definitions=(replace(full, parameters=held(full.kind, values)),))
    (entry,) = entry_sheet(kit, Wanted(("delay",))).entries
    assert any(note.startswith("negative, which some programs refuse: offset delay") for note in entry.notes)


def test_no_negative_numbers_where_none_are_wanted():
    rng = np.random.default_rng(15)
    some = 0
    for _ in range(12):
        kit = random_kit(rng)
        accepts = tuple(term for term in terms_of(kit.definitions[0].kind) if rng.random() < 0.7) or (
            "delay",
        )
        (free,) = entry_sheet(kit, Wanted(accepts)).entries
        (entry,) = entry_sheet(kit, Wanted(accepts, no_negative=True)).entries
        assert all(float(one.text) >= 0.0 for one in entry.typed)
        assert not any("refuse" in note for note in entry.notes)
        some += any(float(one.text) < 0.0 for one in free.typed)
    assert some > 2


def test_fewer_negative_numbers_where_it_hardly_matters():
    """18 ps and 43 fF: with two digits the nearest pair has a negative C0, others are as good for any use."""
    limit = Limit(0.02, 4e9, "the readings end here")
    values = held("open", np.array([18.47, 0.0, 50.0, 43.3, 0.0, 0.0, 0.0]))
    only = Definition(
        *("open", "open", "constant", 3, 50e6, 4e9, 50e6, 4e9, values, ()),
        *(np.array([50e6, 4e9]), np.array([0.005, 0.01]), limit, ()),
    )
    kit = Kit("Made", "", 50.0, 0.02, np.inf, "", "", limit, (only,), (), (), (), (), ())
    (entry,) = entry_sheet(kit, Wanted(("delay", "c0"), digits=("2",))).entries
    assert all(float(one.text) > 0.0 for one in entry.typed)
    assert entry.extra < 0.0005


def test_the_range_is_the_valid_one_or_the_fit_range(kit):
    within = 0.01
    ((_, each),) = limits(kit, [within])
    sheet = entry_sheet(kit, Wanted(("delay",), within=within))
    for entry, limit in zip(sheet.entries, each, strict=True):
        assert (entry.low_hz, entry.top_hz, entry.before) == (50e6, limit.limit_hz, limit)
    strict = entry_sheet(kit, Wanted(("delay",), within=1e-4))
    for entry in strict.entries:
        assert (entry.low_hz, entry.top_hz) == (entry.definition.fit_low_hz, entry.definition.fit_top_hz)
        assert "not good at any frequency" in entry.notes[0]
    assert strict.left.limit_hz == 0.0


def test_reasons_tell_of_the_part_that_typing_takes(kit):
    reason = entry_of(entry_sheet(kit, Wanted(("nothing",))), "short").left.reason
    assert reason.startswith("what is typed differs from the full definition here, ")
    coarse = entry_sheet(kit, Wanted(accepts=("load.resistance", "delay", "c0"), within=0.013))
    reason = entry_of(coarse, "load").left.reason
    first, second = re.fullmatch(
        r"directivity, (\d+) % of the bound;.* what is typed (\d+) %", reason
    ).groups()
    assert 0 < int(second) < int(first) <= 100 - int(second)


@pytest.mark.parametrize("top_hz", [np.inf, 3e9, 10e6])
def test_the_typed_kit_keeps_the_promise(kit, top_hz):
    kit = replace(kit, top_hz=top_hz)
    sheet = entry_sheet(kit, Wanted(("delay", "c0", "l0", "resistance"), digits=("3",), within=0.03))
    typed = typed_kit(sheet)
    ((whole, each),) = limits(typed, [0.03])
    assert whole.limit_hz == sheet.left.limit_hz
    assert [one.limit_hz for one in each] == [entry.left.limit_hz for entry in sheet.entries]
    assert (typed.shares, typed.order, typed.within) == ((), (), 0.03)
    grid = np.geomspace(1e5, 6e9, 777)
    for definition, full, entry in zip(typed.definitions, kit.definitions, sheet.entries, strict=True):
        gamma, bound = curve(typed, definition, grid)
        true, known = curve(kit, full, grid)
        promised = known + np.abs(gamma - true)
        # Straight lines between the stated frequencies, and a constant below the lowest.
        assert (bound >= promised - 2e-5).all()
        np.testing.assert_allclose(bound[grid > 5e4], promised[grid > 5e4], atol=2e-5)
        at = entry.frequency_hz
        np.testing.assert_array_equal(curve(typed, definition, at)[1], entry.bound_and_extra)
        assert at[-1] == full.read_top_hz


def test_zero_bounds_do_no_harm(kit):
    none = replace(
        kit, shares=tuple(Share(one.name, one.freedom, 0.0 * one.covariances) for one in kit.shares)
    )
    silent = replace(
        none,
        definitions=tuple(replace(one, misfit=np.zeros_like(one.misfit)) for one in none.definitions),
    )
    sheet = entry_sheet(silent, Wanted(("delay",)))
    assert all(0.0 < entry.extra < 0.2 for entry in sheet.entries[:2])
    half = replace(none.definitions[0], misfit=np.array([0.0, 0.02]))
    assert entry_sheet(replace(none, definitions=(half,)), Wanted(("delay", "c0"))).entries[0].extra < 0.05


def test_another_reference_impedance():
    values = held("load", np.array([0.0, 0.0, 75.0, 75.3, 0.0, 0.0]))
    limit = Limit(0.02, 4e9, "the readings end here")
    only = Definition(
        *("load", "load", "R", 3, 50e6, 4e9, 50e6, 4e9, values, ()),
        *(np.array([50e6, 4e9]), np.array([0.005, 0.01]), limit, ()),
    )
    kit = Kit("Made", "", 75.0, 0.02, np.inf, "", "", limit, (only,), (), (), (), (), ())
    (entry,) = entry_sheet(kit, Wanted(("nothing",))).entries
    assert entry.values.tolist() == [0.0, 0.0, 75.0, 75.0, 0.0, 0.0]
    assert entry.extra == rounded_up(0.3 / 150.3 * (1 + 1e-6))


def test_values_beyond_all_sense_are_refused_in_words(kit):
    wild = replace(kit.definitions[0], parameters=held("open", np.array([1e300, 0, 50.0, 0, 0, 0, 1e300])))
    sheet = entry_sheet(replace(kit, definitions=(wild,)), Wanted(("delay", "c0")))
    assert np.isfinite(sheet.entries[0].extra)
    none = replace(kit.definitions[2], parameters=held("load", np.array([0, 0, 50.0, np.nan, 0, 0])))
    with pytest.raises(RequestError, match="'load' cannot be computed"):
        entry_sheet(replace(kit, definitions=(none,)), Wanted(("resistance",)))


def test_rounding_up():
    values = [0.0, 1e-9, 0.0012, 0.00120001, 0.0999, 0.1, 1.95, 9.94e-5]
    assert [rounded_up(one) for one in values] == [0.0, 1e-9, 0.0012, 0.0013, 0.1, 0.1, 2.0, 0.0001]
    rng = np.random.default_rng(1)
    for value in 10.0 ** rng.uniform(-12, 0, 500):
        assert value * (1 - 1e-11) <= rounded_up(value) <= 1.1 * value
