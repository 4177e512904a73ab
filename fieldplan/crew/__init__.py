"""What the crew is warned of, and what holds the work until somebody clears it."""
