"""What the contingency is: levels, split, allocation, drivers."""
