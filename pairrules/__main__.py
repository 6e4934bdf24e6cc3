"""`python -m pairrules` is the command `pairrules`."""

from pairrules.cli import main

if __name__ == "__main__":
    main()
