"""What pack.py is made of: the spec, the staged tree, and the checks of what would go onto a device."""
