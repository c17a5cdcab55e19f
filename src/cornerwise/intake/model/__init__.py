"""Model files for simulated campaigns, read as strictly as campaigns are."""

from .reading import read_model

__all__ = ["read_model"]
