import dataclasses
import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats as reference
from scipy.optimize import minimize_scalar

from analysis.errors import SettingError
from analysis.strain import shear, wording
from analysis.strain.cautions import CAUTIONS, NON_UNIQUENESS
from analysis.strain.explanations import (
    LATE_CLEAVAGE,
    PARTITIONED,
    ROTATION,
    UNPARTITIONED,
    ExplainSettings,
    explain,
)
from analysis.strain.frame import Sense
from analysis.strain.observed import Fault, FoldPair

FAULT = Fault(strike_deg=30.0, sense=Sense.SINISTRAL, zone_width_km=4.0, strike_se_deg=0.0)
KEYS = [
    "fold", "fold_fault_angle_deg", "fold_fault_se_deg", "transection_deg", "se_deg", "explanations",
    "likelihood_ratio", "separation_se", "readings_to_separate", "can_be_told_apart", "because", "cautions",
]  # fmt: skip


def pair_at(angle_deg, transection_deg, *, se_deg=1.0, readings=30, **others):
    """A sinistral pair beside FAULT with equal errors of hinge and cleavage and some covariance."""
    half = 0.5 * se_deg**2
    fields = {
        "hinge_trend_deg": (30.0 + angle_deg) % 180.0,
        "transection_deg": transection_deg,
        "trend_variance_deg2": half,
        "hinge_part_deg2": half,
        "cleavage_part_deg2": half,
        "covariance_deg2": -0.8 * half,
        "hinge_readings": readings,
        "cleavage_readings": readings,
    }
    return FoldPair(**(fields | others))


def covariance_of(pair, fault=FAULT):
    shared = pair.covariance_deg2
    angle = pair.trend_variance_deg2 + fault.strike_se_deg**2
    return np.array([[angle, shared], [shared, pair.hinge_part_deg2 + pair.cleavage_part_deg2]])


@pytest.mark.parametrize("df", [math.inf, 12.0])
@pytest.mark.parametrize(("angle_deg", "transection_deg"), [(12.0, 2.0), (27.0, 6.0), (38.0, -1.0)])
def test_the_likelihoods_are_those_of_scipy_at_the_nearest_point(angle_deg, transection_deg, df):
    """Rotation: the best of scipy's densities along its curve; partitioned: along no transection."""
    pair = pair_at(angle_deg, transection_deg, df=df)
    check = explain(FAULT, pair)
    datum = np.array([angle_deg, transection_deg])
    if math.isinf(df):
        density = reference.multivariate_normal(datum, covariance_of(pair)).logpdf
    else:
        density = reference.multivariate_t(datum, covariance_of(pair), df=df).logpdf
    rotation = minimize_scalar(
        lambda angle: -density([angle, float(shear.rotation_transection_deg(angle))]),
        bounds=(1.0, 45.0), method="bounded", options={"xatol": 1e-8},
    )  # fmt: skip
    partitioned = minimize_scalar(lambda angle: -density([angle, 0.0]), bounds=(0.0, 90.0), method="bounded")
    assert check.explanation(ROTATION).loglik == pytest.approx(-rotation.fun, abs=1e-3)
    assert check.explanation(PARTITIONED).loglik == pytest.approx(-partitioned.fun, abs=1e-3)
    assert check.likelihood_ratio == pytest.approx(math.exp(partitioned.fun - rotation.fun), rel=2e-3)


def test_what_rotation_needs_follows_from_the_angle_alone():
    """Folds at 15 degrees: gamma 2.73 and 3.10 degrees (METHOD section 6), four times gamma over 4 km."""
    rotation = explain(FAULT, pair_at(15.0, 1.0)).explanation(ROTATION)
    assert rotation.gamma == pytest.approx(2.73, abs=5e-3)
    assert rotation.displacement_km == pytest.approx(4.0 * rotation.gamma)
    assert rotation.predicted_transection_deg == pytest.approx(3.10, abs=5e-3)
    unknown_width = dataclasses.replace(FAULT, zone_width_km=None)
    assert explain(unknown_width, pair_at(15.0, 1.0)).explanation(ROTATION).displacement_km is None


@pytest.mark.parametrize(("gamma", "late"), [(1.0, 0.5), (3.0, 0.4), (0.6, 0.1)])
def test_late_cleavage_gives_back_the_shear_that_made_the_pair(gamma, late):
    """A pair of known total and recorded shear is explained by exactly these, where rotation does not fit."""
    predicted = shear.simple_shear(gamma, late)
    check = explain(FAULT, pair_at(float(predicted.hinge_deg), float(predicted.transection_deg)))
    found = check.explanation(LATE_CLEAVAGE)
    assert found.gamma == pytest.approx(gamma)
    assert found.gamma_late == pytest.approx(late)
    assert found.fits is True
    assert check.explanation(ROTATION).fits is False
    assert any("Neither of the two fits" in each for each in check.because)
    assert any("Cleavage that began late fits" in each for each in check.because)


@pytest.mark.parametrize(("convergence_deg", "strain"), [(20.0, 1.0), (45.0, 0.7), (60.0, 1.4)])
def test_unpartitioned_transpression_reaches_the_pairs_it_makes(convergence_deg, strain):
    """A pair made by transpression is met by some convergence and strain, to a hundredth of an error."""
    predicted = shear.transpression(convergence_deg, strain)
    pair = pair_at(float(predicted.hinge_deg), float(predicted.transection_deg))
    found = explain(FAULT, pair).explanation(UNPARTITIONED)
    best = -math.log(2.0 * math.pi) - 0.5 * math.log(np.linalg.det(covariance_of(pair)))
    assert found.loglik == pytest.approx(best, abs=1e-4)
    assert found.predicted_transection_deg == pytest.approx(float(predicted.transection_deg), abs=0.02)


@given(st.floats(-60.0, 100.0), st.floats(-30.0, 30.0), st.floats(0.05, 8.0))
def test_a_dextral_fault_is_the_mirror_image_of_a_sinistral_one(angle_deg, transection_deg, se_deg):
    """Mirrored on the map, every figure is the same but the sign of the transections."""
    left = pair_at(angle_deg, transection_deg, se_deg=se_deg)
    right = dataclasses.replace(
        left, hinge_trend_deg=(30.0 - angle_deg) % 180.0, transection_deg=-transection_deg
    )
    one = explain(FAULT, left)
    other = explain(dataclasses.replace(FAULT, sense=Sense.DEXTRAL), right)
    for name in ("fold_fault_angle_deg", "likelihood_ratio", "separation_se"):
        assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-6, abs=1e-9)
    for mine, theirs in zip(one.explanations[:2], other.explanations[:2], strict=True):
        assert theirs.predicted_transection_deg == pytest.approx(-mine.predicted_transection_deg, abs=1e-9)
        assert theirs.gamma == (None if mine.gamma is None else pytest.approx(mine.gamma, rel=1e-6, abs=1e-9))
    assert other.can_be_told_apart == one.can_be_told_apart


@given(
    st.floats(0.0, 180.0),
    st.one_of(st.none(), st.floats(-80.0, 80.0)),
    st.floats(0.0, 40.0),
    st.sampled_from(Sense),
)
def test_any_pair_gives_a_json_of_exactly_the_promised_keys_with_finite_numbers(
    trend_deg, transection_deg, se_deg, sense
):
    """Whatever the input, the JSON has the command's keys, holds no infinity, and carries the cautions."""
    pair = pair_at(0.0, transection_deg, se_deg=se_deg, hinge_trend_deg=trend_deg, df=9.0)
    fault = Fault(strike_deg=30.0, sense=sense, zone_width_km=2.0)
    document = explain(fault, pair, fold="Mossgarth").to_json()
    assert list(document) == KEYS
    json.dumps(document, allow_nan=False)
    assert document["cautions"] == list(CAUTIONS)
    for each in document["explanations"]:
        assert list(each) == ["name", "gamma", "displacement_km", "predicted_transection_deg", "loglik"]
    assert document["because"]


def test_near_the_fault_no_number_of_readings_tells_and_the_displacement_is_named():
    """At 5 degrees they differ by 0.43 degrees: never told apart, and it says what can tell."""
    for se_deg, readings in ((2.0, 20), (0.05, 100_000)):
        check = explain(FAULT, pair_at(5.0, 0.43, se_deg=se_deg, readings=readings))
        assert check.can_be_told_apart is False
        assert check.readings_to_separate is None
        text = " ".join(check.because)
        assert "no number of readings" in text
        assert "What can tell is the displacement: rotation needs 42 km" in text
        assert "cannot be told apart" in wording.headline(check)


def test_the_readings_forecast_are_enough_and_one_in_ten_fewer_are_not():
    """Errors shrunk to the forecast reach the separation needed; with a tenth fewer they do not."""
    for angle_deg in (15.0, 20.0, 27.0, 40.0):
        pair = pair_at(
            angle_deg, 0.5 * float(shear.rotation_transection_deg(angle_deg)), se_deg=1.6, readings=30
        )
        more = explain(FAULT, pair, ExplainSettings(forecast_limit=2000)).more
        assert more.total == more.hinge + more.cleavage > 0

        def shortfall(hinge, cleavage, pair=pair):
            by_hinge, by_cleavage = 30 / (30 + hinge), 30 / (30 + cleavage)
            after = dataclasses.replace(
                pair,
                trend_variance_deg2=pair.trend_variance_deg2 * by_hinge,
                hinge_part_deg2=pair.hinge_part_deg2 * by_hinge,
                covariance_deg2=pair.covariance_deg2 * by_hinge,
                cleavage_part_deg2=pair.cleavage_part_deg2 * by_cleavage,
            )
            check = explain(FAULT, after)
            return check.separation_se - check.needed_se

        assert shortfall(more.hinge, more.cleavage) >= -0.01
        assert shortfall(0.9 * more.hinge, 0.9 * more.cleavage) < 0.0


def test_twice_the_scatter_takes_four_times_the_readings():
    """The readings in all that separate the two grow with the square of the scatter."""
    few = 20 + 20 + explain(FAULT, pair_at(27.0, 2.0, se_deg=1.2, readings=20)).more.total
    many = 20 + 20 + explain(FAULT, pair_at(27.0, 2.0, se_deg=2.4, readings=20)).more.total
    assert many / few == pytest.approx(4.0, rel=0.06)


def test_the_limit_of_readings_is_the_users():
    """A forecast beyond the limit is none at all; with a higher limit it is a number."""
    pair = pair_at(27.0, 2.0, se_deg=6.0, readings=10)
    assert explain(FAULT, pair).readings_to_separate is None
    assert "Not even 200 readings" in " ".join(explain(FAULT, pair).because)
    assert explain(FAULT, pair, ExplainSettings(forecast_limit=2000)).readings_to_separate > 400


def test_a_loose_fault_strike_can_stand_in_the_way():
    """Where only the strike's error keeps the two together, it says so."""
    loose = dataclasses.replace(FAULT, strike_se_deg=6.0)
    check = explain(loose, pair_at(15.0, 1.0, se_deg=1.0, readings=40))
    assert check.readings_to_separate is None
    assert check.strike_in_the_way
    assert any("fault's strike stands in the way" in each for each in check.because)
    assert explain(FAULT, pair_at(15.0, 1.0, se_deg=1.0, readings=40)).readings_to_separate is not None


def test_folds_beyond_the_reach_of_rotation_speak_against_it():
    """At 65 degrees, and on the wrong side of the fault, rotation is out and the angle alone tells."""
    far = explain(FAULT, pair_at(65.0, 0.3))
    assert far.can_be_told_apart
    assert far.likelihood_ratio < 1e-3
    assert far.explanation(ROTATION).fits is False
    wrong_side = explain(FAULT, pair_at(-12.0, 0.3))
    assert wrong_side.fold_fault_angle_deg == pytest.approx(-12.0)
    assert wrong_side.explanation(ROTATION).gamma is None
    assert any("does not put folds" in each for each in wrong_side.because)


def test_the_sense_of_shear_is_a_hint_only_where_the_transection_is_sure():
    """Clockwise hints at sinistral, anticlockwise at dextral, and neither where the interval holds zero."""
    unknown = dataclasses.replace(FAULT, sense=Sense.UNKNOWN)
    assert explain(unknown, pair_at(27.0, 5.0)).sense_hint is Sense.SINISTRAL
    assert explain(unknown, pair_at(27.0, -5.0)).sense_hint is Sense.DEXTRAL
    assert explain(unknown, pair_at(27.0, 1.5)).sense_hint is Sense.UNKNOWN
    against = " ".join(explain(FAULT, pair_at(27.0, -5.0)).because)
    assert "hints at dextral shear" in against
    assert "the fault is given as sinistral" in against


def test_a_pair_between_the_two_is_not_forced_to_either():
    """Precise, and halfway between rotation and none: not told apart, and no number of readings promised."""
    half = 0.5 * float(shear.rotation_transection_deg(27.0))
    check = explain(FAULT, pair_at(27.0, half, se_deg=0.5))
    assert check.separation_se > check.needed_se
    assert not check.can_be_told_apart
    assert check.readings_to_separate is None


def test_without_a_transection_the_displacement_is_still_given():
    """No cleavage yet: fold-fault angle, shear and displacement, no likelihood and no ratio."""
    check = explain(FAULT, pair_at(15.0, None))
    assert check.explanation(ROTATION).displacement_km == pytest.approx(10.93, abs=5e-3)
    assert check.likelihood_ratio is None
    assert check.explanation(ROTATION).loglik is None
    assert not check.can_be_told_apart
    assert wording.headline(check).startswith("No transection yet")


def test_a_hinge_without_a_trend_gives_the_reason_and_nothing_else():
    """A vertical hinge has no fold-fault angle; the answer says why."""
    check = explain(FAULT, pair_at(15.0, 3.0, trend_variance_deg2=math.inf))
    assert check.fold_fault_angle_deg is None
    assert check.explanations == ()
    assert len(check.because) == 1
    assert check.cautions[0] == NON_UNIQUENESS


def test_steep_hinges_make_the_curves_a_guide():
    """Beyond 30 degrees of plunge a sentence says that the curves hold for level hinges."""
    assert any(
        "level hinges" in each for each in explain(FAULT, pair_at(20.0, 3.0, hinge_plunge_deg=50.0)).because
    )
    assert not any("level hinges" in each for each in explain(FAULT, pair_at(20.0, 3.0)).because)


def test_every_headline_is_one_sentence():
    """For each kind of outcome the headline is a single sentence without a stray number format."""
    for angle_deg in (-20.0, 0.0, 3.0, 15.0, 27.0, 44.0, 80.0):
        for transection_deg in (None, -9.0, 0.0, 2.5, 5.0, 20.0):
            check = explain(FAULT, pair_at(angle_deg, transection_deg))
            for text in (wording.headline(check), *check.because):
                assert text.endswith((".", "?"))
                assert "e+" not in text
                assert "nan" not in text.split()
                assert "None" not in text


@pytest.mark.parametrize(
    "wrong", [{"confidence": 1.0}, {"confidence": 0.2}, {"forecast_limit": 0}, {"floor_deg": -1.0}]
)
def test_settings_outside_their_range_are_refused(wrong):
    """Confidence, forecast limit and floor outside what they may be raise SettingError."""
    with pytest.raises(SettingError):
        ExplainSettings(**wrong)
