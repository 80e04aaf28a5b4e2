"""Deformation in three dimensions: any velocity gradient, in steps, and what it does to lines and planes.

Arrays throughout: a velocity gradient or deformation has shape (..., 3, 3) and leading shapes broadcast. The
frame is that of `analysis.strain.frame`. Closed forms for the common cases stand in `analysis.strain.shear`.

Sources: Ramsay & Graham (1970) Can. J. Earth Sci. 7 for deformation by gradients and for passive lines and
planes (from memory); Fossen & Tikoff (1993) J. Struct. Geol. 15 for the velocity gradient of transpression.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
import numpy.typing as npt

from analysis.errors import SettingError
from analysis.orient import vectors

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

_TAYLOR_TERMS = 18  # at a norm of 1/2 the first term left out is below 1e-22
_SCALED_NORM = 0.5


class Ellipsoid(NamedTuple):
    """Strain ellipsoids.

    Attributes
    ----------
    stretches
        (..., 3), principal stretches (1 = unstrained), greatest first.
    axes
        (..., 3, 3), the principal axes as columns, in the same order.

    """

    stretches: Floats
    axes: Floats


def matrix_exponential(matrix: npt.ArrayLike) -> Floats:
    """Exponential of square matrices, shape (..., n, n), by scaling, Taylor's series and squaring.

    Moler & Van Loan (2003) SIAM Rev. 45, method 3. Each matrix of a stack is scaled by itself, so that a
    small one loses nothing beside a large one. Raises SettingError for entries that are not finite.
    """
    a = np.asarray(matrix, dtype=float)
    if not np.all(np.isfinite(a)):
        raise SettingError(
            "a velocity gradient holds a value that is not finite", expected="finite rates and times"
        )
    norm = np.max(np.sum(np.abs(a), axis=-2), axis=-1, initial=0.0)
    halvings = np.ceil(np.log2(np.maximum(norm / _SCALED_NORM, 1.0))).astype(int)
    scaled = a / np.exp2(halvings)[..., np.newaxis, np.newaxis]
    result = term = np.broadcast_to(np.eye(a.shape[-1]), a.shape)
    for order in range(1, _TAYLOR_TERMS + 1):
        term = term @ scaled / order
        result = result + term
    for squaring in range(int(np.max(halvings, initial=0))):
        result = np.where((squaring < halvings)[..., np.newaxis, np.newaxis], result @ result, result)
    return np.asarray(result)


def transpression_gradient(convergence_deg: npt.ArrayLike) -> Floats:
    """Velocity gradient, shape (..., 3, 3), of transpression between vertical walls, per unit of time.

    The walls approach along a direction at `convergence_deg` to the fault: 0 is simple shear, 90 is pure
    shear, and what is lost across the zone is gained upwards (Fossen & Tikoff 1993).
    """
    angle = np.radians(np.asarray(convergence_deg, dtype=float))
    gradient = np.zeros((*angle.shape, 3, 3))
    gradient[..., 0, 1] = np.cos(angle)
    gradient[..., 1, 1] = -np.sin(angle)
    gradient[..., 2, 2] = np.sin(angle)
    return gradient


def deformation(gradient: npt.ArrayLike, time: npt.ArrayLike = 1.0) -> Floats:
    """Deformation, shape (..., 3, 3), after a steady flow of this velocity gradient for this time."""
    return matrix_exponential(
        np.asarray(gradient) * np.asarray(time, dtype=float)[..., np.newaxis, np.newaxis]
    )


def deformation_path(gradients: npt.ArrayLike, durations: npt.ArrayLike) -> Floats:
    """Deformation from the start to the end of every step of a flow that changes from step to step.

    Parameters
    ----------
    gradients
        (steps, ..., 3, 3), the velocity gradient in each step.
    durations
        (steps, ...), the time each step takes; broadcast against the gradients.

    Returns
    -------
    (steps + 1, ..., 3, 3)
        The deformation at the start (no strain) and after each step.

    """
    increments = deformation(gradients, durations)
    path = np.empty((increments.shape[0] + 1, *increments.shape[1:]))
    path[0] = np.eye(3)
    for step, increment in enumerate(increments):
        path[step + 1] = increment @ path[step]
    return path


def deformation_since(path: npt.ArrayLike, step: int) -> Floats:
    """Deformation, shape (..., 3, 3), recorded at the end of a path by a marker made after `step` steps.

    With step 0 it is all of it. Raises SettingError for a step that the path does not have.
    """
    whole = np.asarray(path, dtype=float)
    if not 0 <= step < len(whole):
        raise SettingError(f"the path has no step {step}", where="onset", expected=f"0 to {len(whole) - 1}")
    return np.asarray(whole[-1] @ np.linalg.inv(whole[step]))


def carried_lines(deformed: npt.ArrayLike, lines: npt.ArrayLike) -> Floats:
    """Unit vectors, shape (..., 3), of lines (hinges) that the deformation (..., 3, 3) has carried along."""
    return vectors.unit(np.einsum("...ij,...j->...i", np.asarray(deformed), np.asarray(lines, dtype=float)))


def carried_poles(deformed: npt.ArrayLike, poles: npt.ArrayLike) -> Floats:
    """Unit poles, shape (..., 3), of planes (beds) that the deformation (..., 3, 3) has carried along."""
    back = np.linalg.inv(np.asarray(deformed, dtype=float))
    return vectors.unit(np.einsum("...ji,...j->...i", back, np.asarray(poles, dtype=float)))


def strain_ellipsoid(deformed: npt.ArrayLike) -> Ellipsoid:
    """Strain ellipsoids of deformations, shape (..., 3, 3)."""
    # Singular values of D rather than eigenvalues of D Dt: the short axis keeps its digits at large strain.
    axes, stretches, _ = np.linalg.svd(np.asarray(deformed, dtype=float))
    return Ellipsoid(stretches, axes)


def cleavage_pole(deformed: npt.ArrayLike) -> Floats:
    """Pole, shape (..., 3), of the plane normal to the greatest shortening: cleavage, as assumed here."""
    return np.asarray(strain_ellipsoid(deformed).axes[..., :, 2])


def instantaneous_hinge_deg(gradient: npt.ArrayLike) -> Floats:
    """Angle in plan from x towards y, -90 to 90 degrees, at which hinges start in horizontal beds.

    It is the horizontal direction of greatest stretching rate, at right angles to that of greatest
    shortening; 45 - convergence/2 in transpression (Sanderson & Marchini 1984). Gradients have shape (...,
    3, 3).
    """
    rate = np.asarray(gradient, dtype=float)
    return np.asarray(
        0.5 * np.degrees(np.arctan2(rate[..., 0, 1] + rate[..., 1, 0], rate[..., 0, 0] - rate[..., 1, 1]))
    )


def hinge_vector(angle_deg: npt.ArrayLike, plunge_deg: npt.ArrayLike = 0.0) -> Floats:
    """Unit vector, shape (..., 3) in the frame, of a hinge at an angle in plan from the fault."""
    return vectors.line_vector(angle_deg, plunge_deg)


def transection_deg(hinge: npt.ArrayLike, pole: npt.ArrayLike) -> Floats:
    """Signed angle, shape (...), from hinges to cleavage planes, both (..., 3); positive from x towards y.

    sin |transection| = |h.s| (Borradaile 1978 GSA Bull. 89); the sign is that of (h.s)(up.(h x s)) and is
    lost (0.0 is returned) where that product vanishes.
    """
    h, s = np.asarray(hinge, dtype=float), np.asarray(pole, dtype=float)
    along = np.sum(h * s, axis=-1)
    turned = -np.cross(h, s)[..., 2]
    return np.asarray(np.degrees(np.arcsin(np.clip(along, -1.0, 1.0))) * np.sign(turned))
