"""Tables for a manuscript: one document model, a writer a format."""
