"""``python -m chroma`` is the program ``lamplit``."""

from chroma.cli import main

main()
