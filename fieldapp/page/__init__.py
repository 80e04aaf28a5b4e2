"""The parts of the page that `fieldapp.outcrop` puts together."""
