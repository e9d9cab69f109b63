"""Metals and dielectrics that a drawing may call by name."""

from stdfit.data.drawing_records import Measure

METALS: dict[str, float] = {
    "silver": 6.1e7,
    "copper": 5.8e7,
    "gold": 4.1e7,
    "aluminium": 3.8e7,
    "brass": 1.5e7,
    "nickel": 1.4e7,
    "tin": 0.87e7,
    "phosphor bronze": 0.9e7,
    "beryllium copper": 1.3e7,
    "stainless steel": 0.14e7,
}
"""Conductivity at room temperature in S/m.

Copper: the international annealed copper standard, IEC 60028:1925, 5.8e7. Silver, gold, aluminium, brass, nickel, tin:
D. M. Pozar, "Microwave Engineering", appendix F (from memory). The alloys: common practice, no source; they scatter by
some tens of percent with their composition. Nickel's permeability is taken for 1, as it nearly is at microwaves in
bright plating (common practice, no source)."""

DIELECTRICS: dict[str, Measure] = {
    "air": Measure(1.000635, 0.0001),
    "vacuum": Measure(1.0),
    "ptfe": Measure(2.05, 0.03),
    "pe": Measure(2.26, 0.02),
    "pei": Measure(3.1, 0.1),
}
"""Relative permittivity and its standard uncertainty.

Air: 1.000635 as P. I. Somlo, Proc. IREE Australia 28(1), 1967, 7–9, takes it (published, quoted second-hand); damp or
dry air differs by less than 0.0001 (common practice, no source). Polytetrafluoroethylene (ptfe), polyethylene (pe) and
polyetherimide (pei): common practice, no source; pressed or drilled beads hold less of it than their figure says."""

CHIP_SIZES: dict[str, tuple[float, float]] = {
    "0201": (0.6e-3, 0.3e-3),
    "0402": (1.0e-3, 0.5e-3),
    "0603": (1.6e-3, 0.8e-3),
    "0805": (2.0e-3, 1.25e-3),
    "1206": (3.2e-3, 1.6e-3),
}
"""Length and width in m of rectangular chips, by their code in hundredths of an inch (IEC 60115-8; from memory)."""
