"""Figures drawn from finished rows; nothing is computed here but where ink goes."""
