"""How locations are drawn, and what that means for the mean: one file per layout."""
