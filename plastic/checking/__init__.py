"""Checking: draws examples from declarations, runs laws on them, finds the smallest that fails."""
