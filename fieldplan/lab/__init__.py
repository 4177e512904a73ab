"""What laboratories said, and the spread of a pilot."""
