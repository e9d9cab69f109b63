"""Fits and plans tell from the start how much of them is done, so that a bar can fill."""

from stdfit.fitting.roles import Wish
from stdfit.pipeline import characterise, prepare_bench
from stdfit.pipeline.plan import plan
from stdfit.validity.choose import shapes_for


def orders_of(bench):
    return sum(len(shapes_for(one.kind, one.polynomial, Wish({}))) for one in bench.standards)


def test_a_fit_tells_the_orders_of_all_standards(workshop):
    made, told = workshop(connections=2), []
    characterise(made.bench(), made.readings(), tell=lambda *one: told.append(one))
    total = orders_of(made.bench())
    assert total > len(made.values)
    assert told == [(done, total) for done in range(1, total + 1)]


def test_standards_that_share_a_line_are_counted_once(workshop):
    made, told = workshop(connections=2, same_offset_as={"short": "open"}), []
    characterise(made.bench(), made.readings(), tell=lambda *one: told.append(one))
    assert told == [(done, told[0][1]) for done in range(1, told[0][1] + 1)]


def test_a_check_by_draws_tells_the_draws_alone(workshop):
    made, told = workshop(connections=2), []
    characterise(made.bench(), made.readings(), draws=400, tell=lambda *one: told.append(one))
    assert told == [(200, 400), (400, 400)]


def test_a_plan_tells_its_first_fit_too(workshop):
    made, told = workshop(connections=2), []
    found = plan(prepare_bench(made.bench(), made.readings()), lambda *one: told.append(one))
    total, remedies = orders_of(made.bench()), len(found.remedies)
    assert told == [
        *((done, total) for done in range(1, total + 1)),
        *((done, remedies) for done in range(1, remedies + 1)),
    ]
