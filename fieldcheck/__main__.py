"""`python -m fieldcheck` is the command line."""

from fieldcheck.cli import main

if __name__ == "__main__":
    main()
