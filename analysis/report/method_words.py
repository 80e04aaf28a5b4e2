"""What a report says of method, conventions and care: the same in every report."""

from __future__ import annotations

from typing import Final

METHOD: Final = (
    (
        "Hinge: the direction at right angles to the girdle of the bedding poles, from the principal axes of their"
        " orientation tensor (Scheidegger 1965), together with hinge lines where these were read."
    ),
    (
        "Cleavage: the mean pole, together with the intersection lines, which lie in the cleavage. Mean intersection:"
        " the lines measured, and those computed at outcrops where bedding and cleavage but no line was read."
    ),
    (
        "Transection: the angle between the hinge and the mean cleavage plane (Borradaile 1978). It is zero where the"
        " cleavage contains the hinge, as axial-planar cleavage does, and needs no axial surface."
    ),
    "Ellipses: from the scatter of the readings themselves, widened for small numbers (the F form).",
    (
        "Interval: it holds at all looks together (after Robbins 1970), so that one may read until the answer is clear"
        " without being misled by having looked. It is wider than the ordinary one, which holds at one look only."
    ),
    (
        "Transected: the interval leaves out zero. Axial planar within M: by two one-sided tests (Schuirmann 1987) the"
        " transection is smaller than M. Keep reading: neither yet. Cannot be settled: more readings of this kind would"
        " not settle it, and why."
    ),
    (
        "Outcrops: readings of one outcrop are not independent. From four outcrops on the larger of the two variances"
        " counts, between readings or between outcrops."
    ),
    "Readings far off the fit are named and kept. Nothing is dropped by itself.",
)
FAULT_METHOD: Final = (
    (
        "Rotation: folds start at 45° to the fault and turn as lines in simple shear, and cleavage follows the finite"
        " strain (Ramsay & Huber 1983). Partitioned transpression: faults take up the wrench, and no transection is"
        " left (Tikoff & Teyssier 1994). Unpartitioned transpression: Sanderson & Marchini 1984, Fossen & Tikoff"
        " 1993. Late cleavage records the last part of the shear only."
    ),
    (
        "Each is held against fold-fault angle and transection together, with the covariance of the two. Rotation and"
        " partitioned transpression predict one curve each and are weighed by their likelihoods; the others cover areas"
        " and fit more easily, so they are reported and not weighed."
    ),
)
CONVENTIONS: Final = (
    "Angles are in degrees; azimuths run clockwise from true north, 000 to 359.",
    (
        "Planes: strike/dip by the right-hand rule (looking along strike the plane dips to the right). Lines:"
        " trend/plunge, pointing down."
    ),
    "The transection is positive where, on a map, the cleavage strikes clockwise of the hinge.",
    "Nets are equal-area nets of the lower hemisphere: poles of planes, lines as read.",
    "Interlimb angles are measured across the axial surface.",
)
CAUTIONS: Final = (
    (
        "Look after yourself first: mind traffic, edges, loose rock and tides, and do not work under overhangs alone."
        " No reading is worth a fall."
    ),
    (
        "This is no slope or excavation design. Orientation data describe the rock where they were read. The stability"
        " of a slope, a face or an opening is for people licensed to judge it, under local codes."
    ),
    (
        "The check assumes one cylindrical fold, or one set of folds that shares its hinge. Where folds plunge in"
        " several directions or were folded again, check each part by itself."
    ),
    (
        "The verdict is geometric. By itself it gives no sense of shear: transection of either sense can arise in"
        " either shear, and oblique beds give transection with no wrench at all (Treagus & Treagus 1981, 1992)."
    ),
)
