"""What fills the terminal: ``browse.py`` (tree and card) and ``help.py``."""
