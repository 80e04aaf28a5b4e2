"""hingewise explain: the keys it gives, the cautions it never leaves out, and what it does without a hinge."""

from __future__ import annotations

import json
import re

import pytest

from analysis.cli.pictures import file_names
from analysis.demo import demo_readings
from analysis.files.csvfile import write_readings
from analysis.strain.cautions import CAUTIONS

# Issue 6, item 3.
KEYS = {
    "fold", "fold_fault_angle_deg", "fold_fault_se_deg", "transection_deg", "se_deg", "explanations",
    "likelihood_ratio", "separation_se", "readings_to_separate", "can_be_told_apart", "because", "cautions",
}  # fmt: skip
EXPLANATION_KEYS = {"name", "gamma", "displacement_km", "predicted_transection_deg", "loglik"}


@pytest.fixture(scope="module")
def mossgarth(tmp_path_factory):
    """Write the invented folds beside the Tarrow Fault."""
    path = tmp_path_factory.mktemp("explain") / "mossgarth.csv"
    write_readings(path, demo_readings())
    return path


@pytest.fixture
def told(run, mossgarth):
    """Give the answers for the three folds, by name."""
    result = run(
        "explain", mossgarth, "--fault-strike", 52, "--sense", "sinistral", "--zone-width-km", 2, "--json"
    )
    assert result.exit_code == 0, result.output
    return {one["fold"]: one for one in json.loads(result.stdout)}


def test_json_has_the_keys_of_the_brief_and_no_others(told):
    """Each fold is one object with exactly the keys asked for, each explanation too."""
    assert set(told) == {"Mossgarth fold", "Low Mossgarth fold", "Mossgarth Edge fold"}
    for one in told.values():
        assert set(one) == KEYS
        assert [set(each) for each in one["explanations"]] == [EXPLANATION_KEYS] * 4
        assert isinstance(one["can_be_told_apart"], bool)
        assert one["readings_to_separate"] is None or isinstance(one["readings_to_separate"], int)
        assert one["because"]
        assert one["cautions"] == list(CAUTIONS)


def test_the_figures_are_those_of_the_method(told):
    """Shear strain is cot(angle) - 1, displacement that times the width, predicted transection as METHOD section 6."""
    one = told["Low Mossgarth fold"]
    angle = one["fold_fault_angle_deg"]
    assert 0.0 < angle < 10.0  # the demo: hinge 057, fault 052
    rotation, partitioned = one["explanations"][:2]
    # METHOD section 6: at 5 degrees from the fault gamma is 10.4 and the transection 0.43 degrees.
    assert rotation["gamma"] == pytest.approx(10.4, rel=0.2)
    assert rotation["predicted_transection_deg"] == pytest.approx(0.43, abs=0.15)
    assert rotation["displacement_km"] == pytest.approx(2.0 * rotation["gamma"], rel=1e-5)
    assert partitioned["predicted_transection_deg"] == 0.0
    assert partitioned["gamma"] is None
    assert one["can_be_told_apart"] is False
    assert one["readings_to_separate"] is None


def test_the_words_carry_sentence_reasons_and_cautions(run, mossgarth, told):
    """As text every fold has its sentence, its explanations, the reasons in order and all cautions."""
    result = run("explain", mossgarth, "--fault-strike", 52, "--sense", "sinistral", "--zone-width-km", 2)
    assert result.exit_code == 0
    for name, one in told.items():
        block = result.stdout.split(f"{name}\n")[1].split("\n\n\n")[0]
        places = [block.index(sentence) for sentence in [*one["because"], *CAUTIONS]]
        assert places == sorted(places)
    assert result.stdout.count(CAUTIONS[0]) == len(told)


@pytest.mark.parametrize("options", [(), ("--sense", "dextral"), ("--json",)])
def test_cautions_stand_wherever_an_explanation_is_named(run, mossgarth, options):
    """Without sense and width, for a dextral fault, as text and as JSON."""
    result = run("explain", mossgarth, "--fault-strike", 100, "--fold", "Mossgarth fold", *options)
    assert result.exit_code == 0
    assert "rotation in simple shear" in result.stdout.lower()
    for caution in CAUTIONS:
        assert caution in result.stdout


def test_a_fold_without_a_hinge_is_named_and_left_out(run, tmp_path):
    """Cleavage alone has no hinge: the fold is named on the error stream, and the array is empty."""
    path = tmp_path / "cleavage.csv"
    rows = ["Bare,1,cleavage,45,80,,", "Bare,1,cleavage,47,82,,"]
    path.write_text(
        "fold,outcrop,feature,strike_deg,dip_deg,trend_deg,plunge_deg\n" + "\n".join(rows) + "\n",
        encoding="utf-8",
    )
    result = run("explain", path, "--fault-strike", 52, "--json")
    assert result.exit_code == 0
    assert json.loads(result.stdout) == []
    assert "Bare: no hinge yet" in result.stderr


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (("--fault-strike", 400), "fault strike"),
        (("--fault-strike", 52, "--zone-width-km", 0), "zone width"),
        (("--fault-strike", 52, "--sense", "left"), "sense"),
        ((), "--fault-strike"),
    ],
)
def test_a_fault_that_is_none_is_refused_in_one_line(run, mossgarth, options, words):
    """A strike beyond 360, a zone of no width, an unknown sense and no strike at all are told plainly."""
    result = run("explain", mossgarth, *options)
    assert result.exit_code == 2
    assert result.stdout == ""
    (line,) = result.stderr.splitlines()
    assert words in line


@pytest.mark.parametrize("confidence", [0.51, 0.9999])
def test_every_confidence_of_a_check_is_one_of_an_explanation(run, mossgarth, confidence):
    """At both ends of what check takes, explain and report give an answer."""
    for command in (("explain",), ("report", "-o", mossgarth.parent / "out.html")):
        result = run(*command, mossgarth, "--fault-strike", 52, "--confidence", confidence)
        assert result.exit_code == 0, result.output


def test_a_fold_without_scatter_is_explained_without_a_sense_that_rounding_made(run, tmp_path):
    """Readings without scatter leave a variance of zero, which rounding once made negative and refused."""
    path = tmp_path / "exact.csv"
    assert run("simulate", "--scatter", 0, 0, 0, "-o", path).exit_code == 0
    result = run("explain", path, "--fault-strike", 52)
    assert result.exit_code == 0, result.output
    assert "hints at" not in result.stdout  # the transection is 0.0: it has no sense to hint with
    assert "-0.0" not in result.stdout
    assert "e+" not in result.stdout


def test_report_and_explain_describe_a_fault_by_the_same_options(run):
    """Their help says the same of every option that describes the fault, but for which of them is needed."""
    explain, report = (" ".join(run(command, "--help").stdout.split()) for command in ("explain", "report"))
    start, end = "--fault-strike-se", "displacement."
    assert (
        explain[explain.index(start) : explain.index(end)] == report[report.index(start) : report.index(end)]
    )


def test_pictures_are_written_for_each_fold(run, mossgarth, tmp_path):
    """Plane, region and turning folds come as PNG and SVG, named after the folds; the answer on stdout stays alone."""
    folder = tmp_path / "new" / "explained"
    words = ("--fault-strike", 52, "--sense", "sinistral")
    result = run("explain", mossgarth, *words, "--json", "--pictures", folder)
    assert result.exit_code == 0, result.output
    assert len(json.loads(result.stdout)) == 3
    assert str(folder) in result.stderr
    folds = ("mossgarth-fold", "low-mossgarth-fold", "mossgarth-edge-fold")
    names = {f"{fold}-{kind}" for fold in folds for kind in ("fault", "region", "turning")}
    assert {path.name for path in folder.iterdir()} == {f"{n}.{e}" for n in names for e in ("png", "svg")}
    assert all(path.stat().st_size > 10_000 for path in folder.iterdir())
    assert "Sinistral shear of 1.2" in _words(folder / "mossgarth-fold-turning.svg")


def test_without_the_sense_the_turning_folds_lie_on_their_side(run, mossgarth, tmp_path):
    """Folds anticlockwise of a fault of unknown sense turn as dextral shear turns them."""
    result = run(
        "explain", mossgarth, "--fault-strike", 100, "--fold", "Mossgarth fold", "--pictures", tmp_path
    )
    assert result.exit_code == 0, result.output
    assert "Dextral shear of " in _words(tmp_path / "mossgarth-fold-turning.svg")


def test_a_fold_without_cleavage_has_a_plane_and_no_region(run, tmp_path):
    """What cannot be reckoned is not drawn: no transection, no region."""
    beds = [
        reading
        for reading in demo_readings()
        if reading.feature == "bedding" and reading.fold == "Mossgarth fold"
    ]
    write_readings(tmp_path / "beds.csv", beds)
    result = run("explain", tmp_path / "beds.csv", "--fault-strike", 52, "--pictures", tmp_path / "drawn")
    assert result.exit_code == 0, result.output
    kinds = {path.stem.rsplit("-", 1)[1] for path in (tmp_path / "drawn").iterdir()}
    assert kinds == {"fault", "turning"}


def test_a_folder_that_cannot_be_made_is_said_before_any_work(run, mossgarth):
    """Where a file stands in the way of the folder there is one line, and exit code 2."""
    result = run("explain", mossgarth, "--fault-strike", 52, "--pictures", mossgarth / "inside")
    assert result.exit_code == 2
    assert len(result.stderr.strip().splitlines()) == 1
    assert result.stdout == ""


@pytest.mark.parametrize(
    ("folds", "names"),
    [
        (["", "../up", "a/b", "A b", "a-b"], ["unnamed-fold", "up", "a-b", "a-b-2", "a-b-3"]),
        (["Ærø", "x" * 300, "///"], ["ærø", "x" * 60, "unnamed-fold"]),
    ],
)
def test_no_two_folds_share_a_file_and_none_leaves_the_folder(folds, names):
    """Names of files hold letters and digits only, and are told apart however folds are written."""
    assert file_names(folds) == names


def _words(path):
    """Read the words of a picture: letters are outlines, but the text stands beside each as a comment."""
    return " ".join(re.findall(r"<!-- (.*?) -->", path.read_text(encoding="utf-8")))
