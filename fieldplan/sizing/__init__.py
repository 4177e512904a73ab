"""How many locations, with the working shown."""
