"""The last step: definitions and their covariance become a kit with its limits."""

from dataclasses import replace
from datetime import date
from importlib.metadata import PackageNotFoundError, version

from stdfit.data.bench import Bench
from stdfit.uncertainty.budget import Share
from stdfit.validity.kit import Definition, Kit, SourceFile
from stdfit.validity.limits import ladder, limits


def finished(
    bench: Bench,
    top_hz: float,
    definitions: tuple[Definition, ...],
    order: tuple[str, ...],
    shares: tuple[Share, ...],
    *,
    warnings: tuple[str, ...] = (),
    files: tuple[SourceFile, ...] = (),
    created: str | None = None,
) -> Kit:
    """Return the kit of finished definitions, with its limits.

    Parameters
    ----------
    bench : Bench
    top_hz : float
        Top of the connector family.
    definitions, order, shares
        From `define`.
    warnings : tuple of str
    files : tuple of SourceFile
    created : str, optional
        Date; today's by default.
    """
    counted = {entry.name: entry.matings for entry in bench.standards}
    return with_limits(
        Kit(
            name=bench.name,
            connector=bench.connector,
            reference_ohm=bench.reference_ohm,
            within=bench.within,
            top_hz=top_hz,
            created=created or date.today().isoformat(),
            version=program_version(),
            limit=definitions[0].limit,
            definitions=tuple(replace(one, matings=counted.get(one.name)) for one in definitions),
            order=order,
            shares=shares,
            ladder=(),
            files=files,
            warnings=warnings,
            measured=bench.date or "",
            calibration=bench.calibration or "",
        )
    )


def with_limits(kit: Kit) -> Kit:
    """Return the kit with its limits and its ladder worked out from the rest of it."""
    ((whole, each),) = limits(kit, [kit.within])
    definitions = tuple(
        replace(definition, limit=limit) for definition, limit in zip(kit.definitions, each, strict=True)
    )
    kit = replace(kit, limit=whole, definitions=definitions)
    return replace(kit, ladder=ladder(kit))


def program_version() -> str:
    """Return the version of the installed program."""
    try:
        return version("stdfit")
    except PackageNotFoundError:
        return "unknown"
