"""``python -m specflow`` is the same as the command ``specflow``."""

from specflow.cli import main

if __name__ == "__main__":
    main()
