"""What came back, against the plan."""
