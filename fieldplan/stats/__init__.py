"""What mathematics says: arrays in, numbers out."""
