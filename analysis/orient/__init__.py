"""One reading: attitudes of planes and lines, their notations, and the right-hand rule."""
