"""``python -m labstat``: the same commands."""

from labstat.cli import main

if __name__ == "__main__":
    main()
