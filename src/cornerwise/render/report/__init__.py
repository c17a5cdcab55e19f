"""One self-contained HTML report; nothing is computed here, only arranged and rounded."""
