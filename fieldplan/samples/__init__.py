"""What is taken, under which ids, with which control samples."""
