"""`python -m soacheck`."""

from soacheck.cli import main

if __name__ == "__main__":
    main()
