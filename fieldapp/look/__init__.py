"""How the page looks: colours, type, sizes and drawn signs."""
