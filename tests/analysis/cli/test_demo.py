"""The demo without a window: what a new user gets from the first of the two commands where there is no display."""

from __future__ import annotations

from analysis.cli.demo import show_demo
from analysis.files.csvfile import read_table


def test_verdicts_pictures_and_report_are_written(tmp_path, capsys):
    """Each fold's verdict is printed; readings, net and funnel of each, and the report on all lie in the folder."""
    folder = tmp_path / "new" / "out"
    show_demo(folder)
    printed = capsys.readouterr().out
    for words in ("Transected: cleavage", "Axial planar", "Keep reading", "report.html"):
        assert words in printed
    folds = ("mossgarth-fold", "low-mossgarth-fold", "mossgarth-edge-fold")
    pictures = {f"{f}-{kind}.{e}" for f in folds for kind in ("net", "funnel") for e in ("png", "svg")}
    assert {path.name for path in folder.iterdir()} == pictures | {"mossgarth.csv", "report.html"}
    assert read_table(folder / "mossgarth.csv").folds() == (
        "Mossgarth fold",
        "Low Mossgarth fold",
        "Mossgarth Edge fold",
    )
    report = (folder / "report.html").read_text(encoding="utf-8")
    assert "The invented Mossgarth folds beside the Tarrow Fault" in report
    assert "Before any explanation" in report  # the cautions, ahead of what is said of the fault
