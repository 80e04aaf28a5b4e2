"""Readings on paper: the record, CSV in and out, joining files, GIS exports."""
