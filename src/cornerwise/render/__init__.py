"""From a result to people."""
