"""Surveys: the check of every fold, or square of the map, of an archive that does not fit into memory."""
