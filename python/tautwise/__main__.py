"""``python -m tautwise`` is the ``tautwise`` command."""

from tautwise.cli import main

if __name__ == "__main__":
    main()
