"""Maps: one for the screen that needs no network, one for paper."""
