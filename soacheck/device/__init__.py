"""One power transistor: its ratings and thermal data, as its maker's sheet gives them."""
