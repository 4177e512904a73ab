"""What the results say."""
