"""What is asked: the campaign file, read and checked."""
