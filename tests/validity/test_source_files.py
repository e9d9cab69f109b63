"""Which of a kit's source files are readings: two kits may share a drawing or an adapter, never a reading."""

from dataclasses import replace

import pytest

from stdfit.base.errors import RequestError
from stdfit.validity.change.refusals import refuse
from stdfit.validity.kit import ADAPTER, DRAWING, SourceFile


@pytest.mark.parametrize("prefix", [ADAPTER, DRAWING])
def test_a_shared_drawing_or_adapter_is_no_shared_reading(usual_kit, prefix):
    kit = usual_kit
    old = replace(kit, files=(SourceFile("open", "a.s1p", "1"), SourceFile(f"{prefix}open", "x", "3")))
    new = replace(kit, files=(SourceFile("open", "b.s1p", "2"), SourceFile(f"{prefix}open", "x", "3")))
    refuse(old, new, same_calibration=False)


def test_a_shared_reading_is_refused(usual_kit):
    kit = replace(usual_kit, files=(SourceFile("open", "a.s1p", "1"),))
    with pytest.raises(RequestError, match="a file of readings is in both kits"):
        refuse(kit, kit, same_calibration=False)
