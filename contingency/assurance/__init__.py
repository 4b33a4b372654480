"""Checks that look for the weaknesses of a contingency before an auditor does."""
