"""hingewise simulate: invented folds as CSV, with a known answer."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click
import numpy as np

from analysis.errors import SettingError
from analysis.orient.features import Feature
from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg
from analysis.stats.synthetic import FoldDesign, draw

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.files.reading import Reading

_FIRST = datetime(2026, 1, 1, tzinfo=UTC)


def _trend_plunge(_ctx: click.Context, _option: click.Parameter, text: str) -> tuple[float, float]:
    from analysis.orient.notation import Notation, read_line  # noqa: PLC0415 - as the other parts of this command

    line = read_line(text, Notation.TREND_PLUNGE).line
    return line.trend_deg, line.plunge_deg


@click.command()
@click.option(
    "--hinge",
    metavar="TREND/PLUNGE",
    default="040/10",
    show_default=True,
    callback=_trend_plunge,
    help="The hinge.",
)
@click.option(
    "--limbs",
    metavar="DIP DIP",
    nargs=2,
    type=float,
    default=(55.0, 55.0),
    show_default=True,
    help="Dips of both limbs in the profile, away from the axial surface.",
)
@click.option(
    "--transection",
    metavar="DEG",
    type=float,
    default=0.0,
    show_default=True,
    help="Cleavage against hinge, clockwise positive.",
)
@click.option(
    "--bedding",
    metavar="N",
    type=click.IntRange(0, 10_000_000),
    default=20,
    show_default=True,
    help="Bedding readings.",
)
@click.option(
    "--cleavage",
    metavar="N",
    type=click.IntRange(0, 10_000_000),
    default=15,
    show_default=True,
    help="Cleavage readings.",
)
@click.option(
    "--intersection",
    metavar="N",
    type=click.IntRange(0, 10_000_000),
    default=0,
    show_default=True,
    help="Intersection lines.",
)
@click.option(
    "--scatter",
    metavar="BEDDING CLEAVAGE LINES",
    nargs=3,
    type=float,
    default=(6.0, 5.0, 5.0),
    show_default=True,
    help="Standard deviations of a reading in one direction, degrees.",
)
@click.option(
    "--outcrops", metavar="N", type=int, default=1, show_default=True, help="Outcrops, read in turn."
)
@click.option(
    "--hinge-variation",
    metavar="DEG",
    type=float,
    default=0.0,
    show_default=True,
    help="Standard deviation of the real hinge between outcrops.",
)
@click.option(
    "--folds",
    metavar="N",
    type=click.IntRange(1, 100_000),
    default=1,
    show_default=True,
    help="Folds of this design.",
)
@click.option("--whole-degrees", is_flag=True, help="Round as a compass is read.")
@click.option(
    "--seed",
    type=click.IntRange(min=0),
    default=1,
    show_default=True,
    help="The same seed gives the same readings.",
)
@click.option(
    "-o", "--output", metavar="FILE", type=click.Path(path_type=Path), help="A file instead of the screen."
)
def simulate(
    hinge: tuple[float, float],
    limbs: tuple[float, float],
    transection: float,
    bedding: int,
    cleavage: int,
    intersection: int,
    scatter: tuple[float, float, float],
    outcrops: int,
    hinge_variation: float,
    folds: int,
    seed: int,
    output: Path | None,
    *,
    whole_degrees: bool,
) -> None:
    """Write invented folds with a known answer as CSV.

    \b
    Example:
      hingewise simulate --hinge 028/14 --transection 9 --seed 7 -o invented.csv
    """  # noqa: D301 - click reads the escape
    from analysis.files.csvfile import csv_text, write_readings  # noqa: PLC0415 - pandas only when files are written

    design = FoldDesign(
        hinge_trend_deg=hinge[0],
        hinge_plunge_deg=hinge[1],
        limb_dips_deg=limbs,
        transection_deg=transection,
        bedding_scatter_deg=scatter[0],
        cleavage_scatter_deg=scatter[1],
        line_scatter_deg=scatter[2],
        outcrops=outcrops,
        hinge_variation_deg=hinge_variation,
    )
    if not bedding + cleavage + intersection:
        raise SettingError("no readings were asked for", where="simulate", expected="at least one reading")
    counts = {Feature.BEDDING: bedding, Feature.CLEAVAGE: cleavage, Feature.INTERSECTION: intersection}
    readings = _readings(design, counts, folds, np.random.default_rng(seed), whole_degrees=whole_degrees)
    if output is None:
        click.echo("".join(csv_text(readings)), nl=False)
    else:
        write_readings(output, readings)


def _readings(
    design: FoldDesign,
    counts: dict[Feature, int],
    folds: int,
    rng: np.random.Generator,
    *,
    whole_degrees: bool,
) -> Iterator[Reading]:
    from analysis.files.reading import Reading  # noqa: PLC0415 - as above

    number = 0
    most = max(counts.values())
    for fold in range(folds):
        drawn = draw(design, most, 1, rng)
        axes = (drawn.bedding[0], drawn.cleavage[0], drawn.lines[0])
        values = [
            strike_dip_deg(part) if feature.is_plane else trend_plunge_deg(part)
            for part, feature in zip(axes, counts, strict=True)
        ]
        for k in range(most):
            for (azimuth, inclination), (feature, count) in zip(values, counts.items(), strict=True):
                if k >= count:
                    continue
                number += 1
                pair = (float(azimuth[k]), float(inclination[k]))
                if whole_degrees:
                    pair = (round(pair[0]) % 360.0, float(round(pair[1])))
                names = ("strike_deg", "dip_deg") if feature.is_plane else ("trend_deg", "plunge_deg")
                fields: dict[str, Any] = dict(zip(names, pair, strict=True))
                yield Reading(
                    reading_id=f"simulated-{number:07d}",
                    feature=feature,
                    recorded_at=_FIRST + timedelta(minutes=number),
                    fold=f"invented {fold + 1}",
                    outcrop=f"O{int(drawn.outcrop[k]) + 1:02d}",
                    note="invented by hingewise simulate" if number == 1 else "",
                    **fields,
                )
