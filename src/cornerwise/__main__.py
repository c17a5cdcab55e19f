"""``python -m cornerwise``, and what the installed command runs."""

import signal


def main() -> None:
    """Entry point of the ``cornerwise`` command."""
    signal.signal(signal.SIGINT, signal.SIG_DFL)  # until everything is loaded an interrupt ends it wordlessly
    from .cli import main as run

    run()


if __name__ == "__main__":
    main()
