"""Files to a campaign, strictly: whatever could be misread is refused, every fault at once."""

from .reading import read

__all__ = ["read"]
