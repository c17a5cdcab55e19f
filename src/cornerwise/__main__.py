"""``python -m cornerwise``."""

from .cli import main

if __name__ == "__main__":
    main()
