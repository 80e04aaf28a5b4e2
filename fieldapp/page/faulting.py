"""What the folds can and cannot say about the fault: the explanations held against the running check.

It is worked out when it is asked for, and once for each change of what goes in; a forecast that arrives, or a
reading that leaves hinge and cleavage as they were, changes nothing.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from fieldapp.page.exchange import PageExchange
from fieldapp.states import Change, FaultState, Message, MessageKind

if TYPE_CHECKING:
    from fieldapp.states import FaultInput

ENTER_FAULT = (
    "Enter the strike of the fault, and its sense of slip and the width of the folded zone where they are known: "
    "the folds are then held against it."
)
NO_HINGE = "The angle to the fault comes with the first hinge: read bedding on both limbs, or hinge lines."


class PageFaulting(PageExchange):
    """The fault beside the fold."""

    _faulting: tuple[object, FaultState] | None = None

    def set_fault(self, fault: FaultInput) -> bool:
        """Note the fault beside the current fold; a zone of no width is one whose width is not known."""
        try:
            self._notebook.set_fault(self._fold, replace(fault, zone_width_m=fault.zone_width_m or None))
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._tell(Change.FAULT)
        return True

    @property
    def faulting(self) -> FaultState:
        """What the folds say of the fault, as the readings stand."""
        return self._cached("faulting", Change.CHECK | Change.FAULT | Change.PLACE, self._make_faulting)

    def _make_faulting(self) -> FaultState:
        fault, check = self.fault, self.check
        if fault.strike_deg is None:
            return FaultState(ask=ENTER_FAULT)
        # Loaded with the first fault, so that the page comes up without.
        from fieldapp.explaining import pair_of_check, state_of  # noqa: PLC0415

        pair = pair_of_check(check)
        if pair is None:
            return FaultState(ask=NO_HINGE)
        limits = (check.settings.confidence, check.settings.forecast_limit)
        inputs = (fault, pair, limits, check.fold)
        if self._faulting is None or self._faulting[0] != inputs:
            self._faulting = (inputs, state_of(fault, pair, check))
        return self._faulting[1]
