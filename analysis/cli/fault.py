"""The options that describe a fault, shared by the commands that hold folds against one."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from analysis.strain.frame import Sense
from analysis.strain.observed import Fault

if TYPE_CHECKING:
    from collections.abc import Callable

    from analysis.cli.common import AnyCommand

FAULT_DETAILS = ("fault_strike_se", "sense", "zone_width_km")
"""What is said of a fault beside its strike, by the names that a command gets."""

_DETAILS = (
    click.option(
        "--fault-strike-se",
        metavar="DEG",
        type=float,
        default=2.0,
        show_default=True,
        help="Its standard error.",
    ),
    click.option(
        "--sense",
        type=click.Choice([sense.value for sense in Sense]),
        default=Sense.UNKNOWN.value,
        show_default=True,
        help="Sense of shear on the fault.",
    ),
    click.option(
        "--zone-width-km",
        metavar="W",
        type=float,
        help="Width of the sheared zone: gives the displacement.",
    ),
)


def fault_options(words: str, *, required: bool) -> Callable[[AnyCommand], AnyCommand]:
    """Add --fault-strike, with these words in the help, and what else is said of a fault."""

    def add(command: AnyCommand) -> AnyCommand:
        for option in reversed(_DETAILS):
            command = option(command)
        return click.option("--fault-strike", metavar="DEG", type=float, required=required, help=words)(
            command
        )

    return add


def fault_of(fault_strike: float, fault_strike_se: float, sense: str, zone_width_km: float | None) -> Fault:
    """Make the fault that these options, as the command gets them, describe; SettingError where it cannot be."""
    return Fault(
        strike_deg=fault_strike,
        sense=Sense(sense),
        zone_width_km=zone_width_km,
        strike_se_deg=fault_strike_se,
    )
