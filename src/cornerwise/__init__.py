"""Interaction energies from charge-voltage data and double-mutant cycles."""
