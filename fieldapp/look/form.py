"""What the page can afford on this screen: arrangement and sizes, worked out from its size. No Kivy import.

Lengths are in dp (1/160 inch), type in sp. 88 dp are 14 mm: a key that a cold hand in a glove hits. Where the
screen is too small for that, the pad takes all the height that the rest does not need.
"""

from __future__ import annotations

from dataclasses import dataclass

GOOD_KEY_DP = 88.0  # 14 mm
TOUCH_DP = 48.0  # the smallest thing to touch beside the pad, each way where there is room, 7.6 mm
FAIR_KEY_DP = 70.0  # below this the direction grid gives its room to the keys and takes turns with them
LEAST_WITH_RECENT_DP = 44.0  # where keys would be lower than this, the row of past readings gives its room
LEAST_SPLIT_DP = (960.0, 560.0)  # Log and Check side by side from here on
LOW_DP = 480.0  # lower than this and wider than high: a phone on its side
LINE = 1.26  # height of a line of type, as a share of its size


def line_height(font_size: float, lines: float = 1.0) -> float:
    """Height in pixels of so many lines of type of this size in pixels."""
    return font_size * LINE * lines + 2.0


@dataclass(frozen=True, slots=True)
class Form:
    """The arrangement for a window of this size."""

    width_dp: float
    height_dp: float
    font_scale: float = 1.0
    bars: int = 0  # bars across the page beside the strip: the mark of the demo

    @property
    def split(self) -> bool:
        """Whether Log and Check stand side by side."""
        return (
            self.width_dp > self.height_dp
            and self.width_dp >= LEAST_SPLIT_DP[0]
            and self.height_dp >= LEAST_SPLIT_DP[1]
        )

    @property
    def low(self) -> bool:
        """Whether the page is too low for one column: a phone on its side."""
        return self.height_dp < LOW_DP and self.width_dp > self.height_dp

    @property
    def large(self) -> bool:
        """Whether there is room for larger type: a tablet."""
        return self.width_dp >= 560.0 and self.height_dp >= 700.0

    @property
    def shows_recent(self) -> bool:
        """Whether the last readings have a row of their own; their list is one touch away in any case."""
        if self.low or (self.split and not self.large):
            return False
        left = self._column_dp(recent=True) - self.readout_alone_dp - 3.0 * self.gap_dp
        return left / 4.0 >= LEAST_WITH_RECENT_DP

    @property
    def narrow(self) -> bool:
        """Whether the rows of the Log leaf are too narrow for all their words on one line."""
        return self.row_dp < 480.0

    @property
    def row_dp(self) -> float:
        """Width of the rows of the Log leaf; a phone on its side sets them in half its width."""
        return self.log_width_dp / 2.0 if self.low else self.log_width_dp

    # Type, sp

    @property
    def headline_sp(self) -> float:
        """The sentence of the verdict strip."""
        return 26.0 if self.large else 16.0 if self.low else 18.0

    @property
    def body_sp(self) -> float:
        """Words."""
        return 19.0 if self.large else 16.0

    @property
    def small_sp(self) -> float:
        """Words that name something."""
        return 16.0 if self.large else 13.5

    @property
    def key_sp(self) -> float:
        """The digits on the keys."""
        return 32.0 if self.large else 26.0

    def line_dp(self, size_sp: float, lines: float = 1.0) -> float:
        """Height in dp of so many lines of type."""
        return size_sp * self.font_scale * LINE * lines

    # Heights, dp

    @property
    def gap_dp(self) -> float:
        """Room between things."""
        return 10.0 if self.large and not self.split else 8.0 if self.large else 6.0

    @property
    def edge_dp(self) -> float:
        """Room at the edges of a leaf."""
        return 16.0 if self.large else 8.0

    @property
    def strip_dp(self) -> float:
        """The verdict strip: two lines of sentence on a phone, one on a tablet, and the figures."""
        lines = 1.0 if self.large or self.low or self.split else 2.0
        figures_sp = self.body_sp if self.large else self.small_sp
        return self.line_dp(self.headline_sp, lines) + self.line_dp(figures_sp, self.figure_lines) + 15.0

    @property
    def figure_lines(self) -> float:
        """Lines for the figures below the sentence: two where long ones would be set too small, on a phone on end."""
        return 2.0 if self.font_scale > 1.45 and self.width_dp < 400.0 else 1.0

    @property
    def tabs_dp(self) -> float:
        """The four leaves at the bottom."""
        return max(self.line_dp(self.body_sp) + 22.0, 42.0 if self.low else 48.0)

    @property
    def place_dp(self) -> float:
        """The row that says where we stand."""
        lines = self.line_dp(self.body_sp) + (self.line_dp(self.small_sp) if self.narrow else 10.0)
        return max(lines, 44.0)

    @property
    def feature_dp(self) -> float:
        """The row that chooses the feature."""
        lines = self.line_dp(self.small_sp) * 2.0 + 10.0
        return max(lines, 64.0 if self.large and not self.split else 46.0)

    @property
    def check_dp(self) -> float:
        """The words of the entry check: two lines."""
        return max(self.line_dp(self.small_sp, 2.0) + 8.0, TOUCH_DP)

    @property
    def recent_dp(self) -> float:
        """One row of past readings."""
        return max(self.line_dp(self.small_sp) + 16.0, TOUCH_DP)

    @property
    def recent_columns(self) -> int:
        """Past readings in a row, each with its keys; the last one alone on the narrowest phones."""
        words = 9.0 * 0.58 * self.small_sp * self.font_scale  # "045/30 SE"
        least = 2.0 * TOUCH_DP + 28.0 + words
        return max(int((self.log_width_dp - 2.0 * self.edge_dp + self.gap_dp) / (least + self.gap_dp)), 1)

    @property
    def log_width_dp(self) -> float:
        """Width of the Log leaf."""
        return min(max(self.width_dp * 0.4, 440.0), 560.0) if self.split else self.width_dp

    @property
    def log_height_dp(self) -> float:
        """Height of the Log leaf."""
        return self.height_dp - self.strip_dp - self.tabs_dp - self.bars * self.bar_dp

    @property
    def bar_dp(self) -> float:
        """A bar across the page."""
        return self.line_dp(self.small_sp) + 6.0

    def _column_dp(self, *, recent: bool) -> float:
        """Height left for readout, direction grid and keys, one above the other."""
        fixed = self.place_dp + self.feature_dp + self.check_dp
        if recent:
            fixed += self.recent_dp + self.gap_dp
        return self.log_height_dp - fixed - 6.0 * self.gap_dp

    @property
    def readout_alone_dp(self) -> float:
        """Height of the digits as typed, without the grid beside them."""
        return self.line_dp(self.figure_sp) + self.line_dp(self.small_sp)

    @property
    def figure_sp(self) -> float:
        """The digits as typed."""
        if self.large:
            if self.split:
                return 42.0
            return 86.0 if self.log_width_dp > 700.0 else 60.0
        return 34.0 if self.low else 42.0 if self.height_dp < 700.0 else 48.0

    @property
    def grid_beside(self) -> bool:
        """Whether the direction grid has room beside the digits; else it takes turns with the keys."""
        return self.low or self._key_dp(self.grid_dp) >= FAIR_KEY_DP

    @property
    def grid_dp(self) -> float:
        """Height of the direction grid where it stands beside the digits."""
        return (3.0 * 76.0 + 8.0) if self.large else 3.0 * 46.0 + 8.0

    @property
    def readout_dp(self) -> float:
        """Height of the row with the digits as typed."""
        return max(self.readout_alone_dp, self.grid_dp) if self.grid_beside else self.readout_alone_dp

    def _key_dp(self, readout_dp: float) -> float:
        return (
            self._column_dp(recent=self.shows_recent)
            - max(readout_dp, self.readout_alone_dp)
            - 3.0 * self.gap_dp
        ) / 4.0

    @property
    def key_dp(self) -> float:
        """Height of a key; what is left over beyond 116 dp goes to the list of past readings."""
        if self.low:
            return max((self.log_height_dp - 5.0 * self.gap_dp) / 4.0, 36.0)
        return max(min(self._key_dp(self.readout_dp), 116.0), 36.0)

    @property
    def pad_dp(self) -> float:
        """Height of the key pad."""
        return 4.0 * self.key_dp + 3.0 * self.gap_dp
