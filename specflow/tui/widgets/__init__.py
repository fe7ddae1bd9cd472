"""Parts of a screen, one a file."""
