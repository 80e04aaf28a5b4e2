"""Closed forms: hinges and strain ellipses in simple shear and in transpression, in plan.

Angles are degrees from the fault, positive on the side where shear of the fault's own sense makes folds (see
`analysis.strain.frame`); horizontal hinges, vertical cleavage. Every function takes scalars or arrays and
broadcasts. The transection is the angle from hinge to cleavage, so a positive one is clockwise on a sinistral
fault and anticlockwise on a dextral one.

Assumed throughout, and not shown by any fit: hinges start where the flow stretches fastest, then move as
lines of the rock; cleavage keeps normal to the greatest shortening since its onset.

Sources: Ramsay & Huber (1983) for simple shear (from memory); Sanderson & Marchini (1984) J. Struct. Geol. 6;
Fossen & Tikoff (1993) J. Struct. Geol. 15; Tikoff & Teyssier (1994) J. Struct. Geol. 16.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
import numpy.typing as npt

from analysis.errors import SettingError

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

START_ANGLE_DEG = 45.0  # where folds start in simple shear
STRETCH_SWAP_DEG = float(np.degrees(np.arcsin(1.0 / 3.0)))
"""Convergence angle, 19.47 degrees, above which stretching is fastest upwards (Fossen & Tikoff 1993)."""


class Predicted(NamedTuple):
    """What a deformation predicts, degrees: hinge and cleavage from the fault, and the angle between them."""

    hinge_deg: Floats
    cleavage_deg: Floats

    @property
    def transection_deg(self) -> Floats:
        """Angle from hinge to cleavage, positive in the sense of the shear's own frame."""
        return np.asarray(self.cleavage_deg - self.hinge_deg)


def _acot_deg(cotangent: npt.ArrayLike) -> Floats:
    """Angle with this cotangent, 0 to 180 degrees."""
    return np.asarray(np.degrees(np.arctan2(1.0, np.asarray(cotangent, dtype=float))))


def _cot(angle_deg: npt.ArrayLike) -> Floats:
    angle = np.radians(np.asarray(angle_deg, dtype=float))
    return np.asarray(np.cos(angle) / np.sin(angle))


def simple_shear(
    gamma: npt.ArrayLike, gamma_late: npt.ArrayLike | None = None, start_deg: npt.ArrayLike = START_ANGLE_DEG
) -> Predicted:
    """Hinge and cleavage after shear strain `gamma` >= 0.

    Parameters
    ----------
    gamma
        Shear strain since the folds began.
    gamma_late
        The part of it, 0 < gamma_late <= gamma, that cleavage has recorded; all of it unless given.
    start_deg
        Angle at which the hinges began, 0 < start < 180.

    Notes
    -----
    cot(hinge) = cot(start) + gamma; cleavage = atan2(2, gamma_late)/2.

    """
    total = _not_negative(gamma, "gamma")
    late = total if gamma_late is None else _not_negative(gamma_late, "gamma_late")
    return Predicted(_acot_deg(_cot(start_deg) + total), 0.5 * np.degrees(np.arctan2(2.0, late)))


def gamma_of_angle(fold_fault_deg: npt.ArrayLike) -> Floats:
    """Shear strain that turns hinges from 45 degrees to this angle: cot(angle) - 1.

    Infinite at 0, where hinges never arrive, and beyond it; negative above 45 degrees, where shear of this
    sense cannot put them.
    """
    angle = np.asarray(fold_fault_deg, dtype=float)
    inside = angle > 0.0
    return np.where(inside, _cot(np.where(inside, angle, 45.0)) - 1.0, np.inf)


def rotation_transection_deg(fold_fault_deg: npt.ArrayLike) -> Floats:
    """Transection that rotation in simple shear predicts for hinges found at this angle.

    Zero at and beyond the ends of its reach: 0 degrees (endless shear) and 45 degrees (none).
    """
    angle = np.clip(np.asarray(fold_fault_deg, dtype=float), 0.0, START_ANGLE_DEG)
    gamma = np.maximum(gamma_of_angle(angle), 0.0)
    return np.asarray(0.5 * np.degrees(np.arctan2(2.0, gamma)) - angle)


def late_shear_of_pair(fold_fault_deg: npt.ArrayLike, transection_deg: npt.ArrayLike) -> Floats:
    """Shear strain that cleavage must have recorded: 2 cot(2(angle + transection)).

    Late cleavage explains the pair where this lies between 0 and `gamma_of_angle(fold_fault_deg)`.
    """
    return np.asarray(
        2.0 * _cot(2.0 * (np.asarray(fold_fault_deg, dtype=float) + np.asarray(transection_deg)))
    )


def effective_convergence_deg(convergence_deg: npt.ArrayLike, share: npt.ArrayLike) -> Floats:
    """Convergence angle felt by the folds where faults take a share, 0 to 1, of the movement along the zone.

    atan(tan(convergence)/(1 - share)) (Tikoff & Teyssier 1994): 90 degrees, pure shear, where they take it
    all.
    """
    angle, taken = np.radians(_convergence(convergence_deg)), np.asarray(share, dtype=float)
    if not np.all((taken >= 0.0) & (taken <= 1.0)):
        raise SettingError("the share that faults take is outside 0 to 1", where="share", expected="0 to 1")
    return np.asarray(np.degrees(np.arctan2(np.sin(angle), np.cos(angle) * (1.0 - taken))))


def transpression_strain(convergence_deg: npt.ArrayLike, strain: npt.ArrayLike) -> tuple[Floats, Floats]:
    """Give the two numbers of D = [[1, G, 0], [0, k, 0], [0, 0, 1/k]]: (G, k).

    `strain` is t >= 0 with gamma = t cos(convergence), k = exp(-t sin(convergence)), G = gamma (1 -
    k)/ln(1/k) (Fossen & Tikoff 1993).
    """
    angle, t = np.radians(_convergence(convergence_deg)), _not_negative(strain, "strain")
    shortening = t * np.sin(angle)
    some = shortening > 0.0
    ratio = np.where(some, -np.expm1(-shortening) / np.where(some, shortening, 1.0), 1.0)
    return np.asarray(t * np.cos(angle) * ratio), np.asarray(np.exp(-shortening))


def transpression(
    convergence_deg: npt.ArrayLike,
    strain: npt.ArrayLike,
    onset: npt.ArrayLike = 0.0,
    start_deg: npt.ArrayLike | None = None,
    share: npt.ArrayLike = 0.0,
) -> Predicted:
    """Hinge and cleavage after transpression.

    Parameters
    ----------
    convergence_deg
        Angle, 0 to 90, between the fault and the direction in which the walls approach.
    strain
        t >= 0, movement of the walls over the width of the zone (integrated); gamma = t cos(convergence).
    onset
        Share of the strain, 0 to 1, that had passed when cleavage began to record.
    start_deg
        Angle at which the hinges began; 45 - convergence/2 unless given.
    share
        Share of the movement along the zone that faults take, 0 to 1. The folds feel the rest of it and all
        of the movement across the zone (Tikoff & Teyssier 1994).

    Notes
    -----
    cot(hinge) = (cot(start) + G)/k; tan(2 cleavage) = 2Gk/(1 + G^2 - k^2).

    """
    angle, t = _convergence(convergence_deg), _not_negative(strain, "strain")
    passed = np.asarray(onset, dtype=float)
    if not np.all((passed >= 0.0) & (passed <= 1.0)):
        raise SettingError(
            "the onset of cleavage is outside 0 to 1", where="onset", expected="a share, 0 to 1"
        )
    felt = effective_convergence_deg(angle, share)
    along = t * np.cos(np.radians(angle)) * (1.0 - np.asarray(share, dtype=float))
    t = np.hypot(along, t * np.sin(np.radians(angle)))
    began = START_ANGLE_DEG - 0.5 * felt if start_deg is None else np.asarray(start_deg, dtype=float)
    shear, k = transpression_strain(felt, t)
    # (cos + G sin)/(k sin) rather than (cot + G)/k: a hinge that starts along the fault stays along it.
    began_rad = np.radians(began)
    hinge = np.degrees(np.arctan2(k * np.sin(began_rad), np.cos(began_rad) + shear * np.sin(began_rad)))
    late_shear, late_k = transpression_strain(felt, t * (1.0 - passed))
    # 1 - k^2 by expm1, and the limit of the axis where nothing has been recorded yet: the instantaneous one.
    gained = late_shear**2 - np.expm1(-2.0 * t * (1.0 - passed) * np.sin(np.radians(felt)))
    axis = 0.5 * np.degrees(np.arctan2(2.0 * late_shear * late_k, gained))
    nothing = (late_shear == 0.0) & (gained == 0.0)
    return Predicted(hinge, np.where(nothing, START_ANGLE_DEG - 0.5 * felt, axis))


def offset_per_width(convergence_deg: npt.ArrayLike, strain: npt.ArrayLike) -> Floats:
    """Displacement along the fault over the zone's present width: G/k, which is gamma in simple shear."""
    shear, k = transpression_strain(convergence_deg, strain)
    return np.asarray(shear / k)


def _not_negative(value: npt.ArrayLike, name: str) -> Floats:
    values = np.asarray(value, dtype=float)
    if not np.all(values >= 0.0):
        raise SettingError(
            f"{name} holds a value below 0 or none at all",
            where=name,
            expected="0 or more",
            mend="Shear of the other sense is positive in its own frame: turn the sense, not the sign.",
        )
    return values


def _convergence(value: npt.ArrayLike) -> Floats:
    values = np.asarray(value, dtype=float)
    if not np.all((values >= 0.0) & (values <= 90.0)):
        raise SettingError(
            "a convergence angle is outside 0 to 90",
            where="convergence",
            expected="0 (shear) to 90 (head on)",
        )
    return values
