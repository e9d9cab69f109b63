"""Commands that take a kit file: show, curve, limit, device."""

from __future__ import annotations

from stdfit.cli.exit_codes import DONE
from stdfit.cli.screen import print_csv, print_json, print_text

# typing and pathlib alone take as long to import as the rest of `--help`.
TYPE_CHECKING = False
if TYPE_CHECKING:
    import argparse


def show(asked: argparse.Namespace) -> int:
    """Show a kit."""
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import kit_data
    from stdfit.writing.summary import summary

    kit = read_kit(asked.kit)
    if asked.json:
        print_json(kit_data(kit))
    else:
        print_text(summary(kit))
    return DONE


def curve(asked: argparse.Namespace) -> int:
    """Print reflection and bound over frequency."""
    import numpy as np

    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import COLUMNS, curve_rows

    kit = read_kit(asked.kit)
    names = asked.standard or [definition.name for definition in kit.definitions]
    rows = curve_rows(kit, names, asked.points, None if asked.at is None else np.array(asked.at))
    if asked.json:
        print_json({"curve": [dict(zip(COLUMNS, row, strict=True)) for row in rows]})
        return DONE
    print_csv(COLUMNS, rows)
    return DONE


def limit(asked: argparse.Namespace) -> int:
    """Print limits and reasons."""
    from stdfit.base.errors import RequestError
    from stdfit.validity.device.questions import answers, impedance_within, phase_within, return_loss_within
    from stdfit.validity.limits import limits
    from stdfit.writing.device_text import answer_data, answer_lines
    from stdfit.writing.kit_reading import read_kit
    from stdfit.writing.plain_data import limit_data
    from stdfit.writing.summary import limit_lines

    kit = read_kit(asked.kit)
    questions = [
        *(return_loss_within(*one) for one in asked.return_loss),
        *(impedance_within(ohm, percent, kit.reference_ohm) for ohm, percent in asked.impedance),
        *(phase_within(one) for one in asked.phase),
    ]
    if asked.standards and not questions:
        raise RequestError(
            "--standards is given without a question about devices",
            "add --return-loss, --impedance or --phase, or leave it out",
        )
    # Who asks about devices alone wants no table of standards.
    found = limits(kit, asked.within or ([] if questions else [kit.within]))
    told = answers(kit, questions, asked.standards) if questions else []
    if asked.json:
        print_json({**limit_data(kit, found), **({"devices": answer_data(told)} if told else {})})
        return DONE
    if found:
        print_text(limit_lines(kit, found))
    if told:
        print_text("\n".join([*([""] if found else []), *answer_lines(told)]))
    return DONE


def device(asked: argparse.Namespace) -> int:
    """Print what a kit leaves in an analyser, and the bound on devices."""
    import numpy as np

    from stdfit.base.errors import RequestError
    from stdfit.validity.device.bound import common_top, device_map, three_of
    from stdfit.writing.device_text import TABLE_GHZ, device_data, device_rows, device_text, round_frequencies
    from stdfit.writing.kit_reading import read_kit

    if asked.at is not None and asked.points is not None:
        raise RequestError("--at and --points are asked for at once", "leave one of them out")
    if asked.csv and asked.json:
        raise RequestError("--csv and --json are asked for at once", "leave one of them out")
    kit = read_kit(asked.kit)
    three = three_of(kit, asked.standards)
    low, top = max(one.read_low_hz for one in three), common_top(three)
    if asked.at is not None:
        grid = np.array(asked.at)
    elif asked.points is not None:
        grid = np.linspace(low, top, asked.points) if asked.points > 1 else np.array([top])
    else:
        grid = round_frequencies(low, top, 8, TABLE_GHZ)
    errors = device_map(kit, three, grid)
    if asked.json:
        print_json(device_data(kit, errors, asked.magnitude))
    elif asked.csv:
        print_csv(*device_rows(errors, asked.magnitude))
    else:
        print_text(device_text(kit, errors, asked.magnitude))
    return DONE
