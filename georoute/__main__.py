"""``python -m georoute``."""

from georoute.cli import main

if __name__ == "__main__":
    main()
