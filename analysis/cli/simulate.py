"""hingewise simulate: invented folds as CSV, with a known answer."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING, Any

import click
import numpy as np

from analysis.cli.common import output_option
from analysis.cli.design import design_of, design_options
from analysis.errors import SettingError
from analysis.orient.features import Feature
from analysis.orient.vectors import strike_dip_deg, trend_plunge_deg
from analysis.stats.synthetic import draw

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from analysis.files.reading import Reading
    from analysis.stats.synthetic import FoldDesign

_FIRST = datetime(2026, 1, 1, tzinfo=UTC)


@click.command()
@design_options
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
@output_option((".csv",), "A file instead of the screen; a name that ends in .csv.", required=False)
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

    design = design_of(hinge, limbs, scatter, outcrops, hinge_variation, transection_deg=transection)
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
