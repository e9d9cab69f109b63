"""Pictures of a kit, for a page and for notebooks."""

from stdfit.writing.pictures.figures import kit_pictures
from stdfit.writing.pictures.palette import DARK, PALETTE
from stdfit.writing.pictures.record import Picture

__all__ = ["DARK", "PALETTE", "Picture", "kit_pictures"]
