"""``python -m optim`` is the command ``sectionwright``."""

from optim.cli.app import main

if __name__ == "__main__":
    main()
