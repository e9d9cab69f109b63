"""Simulated benches with a known truth: the judge of every bound the program states.

`elements` holds the physics and `parts` draws standards; `analyser` is an imperfect correction and `session`
what changes from reading to reading; `bench` puts them together, `files` writes them, `scenario` says what is
asked for and `families` names the kinds of bench. Nothing here uses the models that are fitted: the truth is
made of steps, skin effect, pads and radiation, not of polynomials.
"""

from stdfit.trials.analyser import StatedDecibels
from stdfit.trials.bench import Evidence, SimulatedBench, draw_bench
from stdfit.trials.families import demo_scenario, families
from stdfit.trials.files import write_bench
from stdfit.trials.parts import Part, draw_part, reflection
from stdfit.trials.scenario import Scenario

__all__ = [
    "Evidence",
    "Part",
    "Scenario",
    "SimulatedBench",
    "StatedDecibels",
    "demo_scenario",
    "draw_bench",
    "draw_part",
    "families",
    "reflection",
    "write_bench",
]
