"""The app on the outcrop: notebook, presenter, devices, leaves. It imports analysis; nothing imports it."""
