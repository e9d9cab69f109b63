"""Adapters that a bench names: determined before, or estimated; what they do, and how sure that is."""

from collections.abc import Collection, Sequence
from dataclasses import dataclass

import numpy as np

from stdfit.base.arrays import ComplexArray, FloatArray
from stdfit.base.errors import BenchError, RequestError
from stdfit.circuits.two_port import LineTwoPort, line_two_port, loss_of_decibels, terms_by_s
from stdfit.data.bench import Bench
from stdfit.data.bench_records import AdapterEntry, Given
from stdfit.data.ordinary import digest
from stdfit.data.words import quoted
from stdfit.uncertainty.region import CIRCULAR
from stdfit.uncertainty.smooth import bumps, correlation_lengths
from stdfit.validity.adapter import Adapter, s_at, term_vectors
from stdfit.validity.kit import Ancestor
from stdfit.validity.thru import Thru
from stdfit.writing.adapter_reading import read_adapter

ASSUMED_LOSS_DB = Given(0.05, 0.05)
"""Of an adapter of which nothing is said, one way at 1 GHz (common practice, no source)."""

ASSUMED_Z0_PART = 0.01
"""Standard uncertainty of an impedance of which nothing is said, as part of the reference (common practice, no
source)."""

SAME_OHM = 1e-9
"""Reference impedances that differ by less than this part are the same."""


@dataclass(frozen=True, slots=True, eq=False)
class TermSource:
    """Real random numbers of unit variance, and what each makes of the three terms of the error on a standard.

    Attributes
    ----------
    part : str
        What is uncertain.
    vectors : tuple of complex arrays of shape (n, 3, q)
        One for each correlation length that is tried, or one for all of them.
    freedom : float
    """

    part: str
    vectors: tuple[ComplexArray, ...]
    freedom: float = np.inf


@dataclass(frozen=True, slots=True, eq=False)
class Determined:
    """An adapter from an adapter file.

    Attributes
    ----------
    adapter : Adapter
    sha256 : str
        Of the file.
    """

    adapter: Adapter
    sha256: str

    @property
    def name(self) -> str:
        """Its name, as its file has it."""
        return self.adapter.name

    @property
    def roots(self) -> frozenset[str]:
        """Digests of what its errors come from: kits, their ancestors, readings."""
        ancestors = (one.sha256 for one in self.adapter.ancestors)
        readings = (one.sha256 for one in self.adapter.files)
        return frozenset((*ancestors, *readings))

    def s(self, frequency_hz: FloatArray) -> ComplexArray:
        """Return S11, S21, S22, shape (n, 3)."""
        return s_at(self.adapter, frequency_hz)

    def unsure(self, frequency_hz: FloatArray) -> FloatArray:
        """Return about the 95 % bound of what its errors do to a full reflection, shape (n,)."""
        return np.asarray(CIRCULAR * np.sqrt(0.5 * _power(term_vectors(self.adapter, frequency_hz))))

    def term_sources(self, frequency_hz: FloatArray, span: tuple[float, float]) -> list[TermSource]:
        """Return its errors: smooth functions of frequency of unknown correlation length."""
        roots = term_vectors(self.adapter, frequency_hz)
        if not roots.any():
            return []
        vectors = tuple(
            (roots[..., None] * bumps(frequency_hz, *span, float(length))[:, None, None]).reshape(
                frequency_hz.size, 3, -1
            )
            for length in correlation_lengths(span[1] - span[0])
        )
        return [TermSource("as determined", vectors, self.adapter.freedom)]


@dataclass(frozen=True, slots=True, eq=False)
class Estimated:
    """An adapter of which delay, loss and impedance are roughly known.

    Attributes
    ----------
    name : str
    delay_ps, loss_db, z0_ohm : Given
        Each with its standard uncertainty.
    reference_ohm : float
    """

    name: str
    delay_ps: Given
    loss_db: Given
    z0_ohm: Given
    reference_ohm: float

    def line(self, frequency_hz: FloatArray) -> LineTwoPort:
        """Return it as a line."""
        delay = 1e-12 * self.delay_ps.value
        return line_two_port(
            frequency_hz,
            delay_s=delay,
            loss_ohm_per_s=loss_of_decibels(self.loss_db.value, delay, self.z0_ohm.value),
            z0_ohm=self.z0_ohm.value,
            reference_ohm=self.reference_ohm,
        )

    def s(self, frequency_hz: FloatArray) -> ComplexArray:
        """Return S11, S21, S22, shape (n, 3)."""
        return self.line(frequency_hz).s

    def unsure(self, frequency_hz: FloatArray) -> FloatArray:
        """Return about the 95 % bound of what its errors do to a full reflection, shape (n,)."""
        each = [one.vectors[0] for one in self.term_sources(frequency_hz, (0.0, 0.0))]
        return np.asarray(CIRCULAR * np.sqrt(0.5 * sum(_power(one) for one in each)))

    def term_sources(self, frequency_hz: FloatArray, span: tuple[float, float]) -> list[TermSource]:
        """Return its errors: one number each for delay, loss and impedance.

        The loss in dB stays what it is when the delay or the impedance is another: an error of these takes the offset
        loss r = 2·Z0·αl/τ along.
        """
        line, terms = self.line(frequency_hz), terms_by_s(self.s(frequency_hz))
        delay, z0 = 1e-12 * self.delay_ps.value, self.z0_ohm.value
        loss = loss_of_decibels(self.loss_db.value, delay, z0)
        changes = {
            "delay": (line.by_delay - line.by_loss * loss / delay) * 1e-12 * (self.delay_ps.u or 0.0),
            "loss": line.by_loss * loss_of_decibels(self.loss_db.u or 0.0, delay, z0),
            "impedance": (line.by_z0 + line.by_loss * loss / z0) * (self.z0_ohm.u or 0.0),
        }
        return [TermSource(part, (terms @ change[..., None],)) for part, change in changes.items()]


Known = Determined | Estimated


def _power(vectors: ComplexArray) -> FloatArray:
    """Return the mean over the phases of a full reflection of the variance that vectors of shape (n, 3, q) make."""
    return np.asarray((np.abs(vectors) ** 2).sum(axis=(1, 2)))


def known_adapters(bench: Bench) -> dict[str, Known]:
    """Return the adapters of a bench by name.

    Raises
    ------
    InputError
        An adapter is not known, its file cannot be used, or it is of another reference impedance.
    """
    return {one.name: _known(bench, one) for one in bench.adapters}


def _known(bench: Bench, entry: AdapterEntry) -> Known:
    key = f"adapter[{quoted(entry.name)[1:-1]}]"
    if entry.file is not None:
        adapter = read_adapter(entry.file)
        if abs(adapter.reference_ohm / bench.reference_ohm - 1.0) > SAME_OHM:
            raise BenchError(
                f"the adapter is of {adapter.reference_ohm:g} Ω, and the bench of {bench.reference_ohm:g} Ω",
                "determine it with the same reference impedance",
                file=bench.path,
                key=f"{key}.file",
            )
        return Determined(adapter, digest(entry.file))
    if entry.delay_ps is None:
        raise BenchError(
            "nothing is said of this adapter",
            "determine it with 'stdfit adapter' and write file = \"…\", or write delay_ps = { value = …, u = … }",
            file=bench.path,
            key=key,
        )
    zr = bench.reference_ohm
    return Estimated(
        entry.name,
        entry.delay_ps,
        entry.loss_db or ASSUMED_LOSS_DB,
        entry.z0_ohm or Given(zr, ASSUMED_Z0_PART * zr),
        zr,
    )


def adapter_cautions(bench: Bench, known: Sequence[Known]) -> list[str]:
    """Say what had to be assumed of adapters, and what their files say."""
    told = []
    entries = {one.name: one for one in bench.adapters}
    for one in known:
        if isinstance(one, Determined):
            told += [f"adapter {one.name}: {warning}" for warning in one.adapter.warnings]
            continue
        assumed = []
        if entries[one.name].loss_db is None:
            assumed.append(f"a loss of {one.loss_db.value:g} ± {one.loss_db.u:g} dB at 1 GHz")
        if entries[one.name].z0_ohm is None:
            assumed.append(f"an impedance of {one.z0_ohm.value:g} ± {one.z0_ohm.u:g} Ω")
        if assumed:
            told.append(
                f"adapter {one.name}: {' and '.join(assumed)} assumed (one standard deviation; common practice, no "
                "source)"
            )
    return told


def adapter_ancestors(known: Sequence[Known], others: Sequence[Ancestor] = ()) -> tuple[Ancestor, ...]:
    """Return the kits that adapters were determined with, and theirs, beside other ancestors: each once."""
    own = [one for adapter in known if isinstance(adapter, Determined) for one in adapter.adapter.ancestors]
    return tuple({(one.sha256, one.of): one for one in (*others, *own)}.values())


def shared_cautions(known: Sequence[Known], roots: Collection[str]) -> list[str]:
    """Say of which adapters the errors may go together with those of references.

    Parameters
    ----------
    known : sequence of Known
    roots : collection of str
        Digests of what the references' errors come from: kits, their ancestors, readings.
    """
    return [
        f"adapter {one.name} and the references come from a kit or readings in common: how their errors go together is "
        "not known, and they are counted as independent"
        for one in known
        if isinstance(one, Determined) and not one.roots.isdisjoint(roots)
    ]


def thru_of(bench: Bench) -> Thru | None:
    """Return the thru that a bench names, from its adapter file; None where it names none.

    Raises
    ------
    InputError
    """
    if bench.thru is None:
        return None
    known = known_adapters(bench)[bench.thru]
    if not isinstance(known, Determined):
        raise RequestError(
            f"the thru '{bench.thru}' is not determined", "name its adapter file", file=bench.path
        )
    return Thru(bench.thru, known.adapter.line, known.sha256)
