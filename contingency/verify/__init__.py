"""Takes a report apart, computes it again, and says what holds."""
