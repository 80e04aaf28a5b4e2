"""Position, attitude sensors, vibration, speech, keep-awake and battery, each behind a small port.

Importing this package loads neither plyer nor any device's system; see `fieldapp.devices.choose`.
"""
