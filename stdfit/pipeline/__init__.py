"""From a bench to a kit: the one path that library users and the command share."""

from stdfit.pipeline.path import (
    characterise,
    fit_bench,
    kit_of,
    prepare_bench,
    program_version,
    read_sweeps,
    with_limits,
)
from stdfit.pipeline.prepare import Prepared, prepare
from stdfit.pipeline.settle import choose_all, settle

__all__ = [
    "Prepared",
    "characterise",
    "choose_all",
    "fit_bench",
    "kit_of",
    "prepare",
    "prepare_bench",
    "program_version",
    "read_sweeps",
    "settle",
    "with_limits",
]
