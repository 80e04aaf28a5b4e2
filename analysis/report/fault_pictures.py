"""Which figures of the fault check a fold gives."""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.report.fault_figures import plane_figure, region_figure, turning_figure
from analysis.strain.explanations import ROTATION
from analysis.strain.frame import Sense
from analysis.strain.inverse import fitting_region
from analysis.strain.observed import fold_fault_angle_deg

if TYPE_CHECKING:
    from collections.abc import Iterator

    from matplotlib.figure import Figure

    from analysis.strain.explanations import FaultCheck


def fault_pictures(check: FaultCheck, confidence: float) -> Iterator[tuple[str, Figure]]:
    """Draw what there is to draw of an explained fold, each figure with its kind.

    The plane of explanations always; the region that fits where there is a transection; folds turning by the shear
    that rotation needs where it needs any that ends.
    """
    yield "fault", plane_figure(check, confidence=confidence)
    region = fitting_region(check.pair, check.fault, confidence=confidence)
    if region is not None:
        yield "region", region_figure(region, fold=check.fold)
    gamma = next((one.gamma for one in check.explanations if one.name == ROTATION), None)
    if gamma is not None:
        # Where the sense is unknown, the side on which the folds lie is that of one sense alone.
        _, sign = fold_fault_angle_deg(check.pair, check.fault)
        sense = Sense.DEXTRAL if sign < 0 else Sense.SINISTRAL
        yield "turning", turning_figure(gamma, sense=sense, fault_strike_deg=check.fault.strike_deg)
