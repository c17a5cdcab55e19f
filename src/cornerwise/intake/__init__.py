"""From files to a campaign."""
