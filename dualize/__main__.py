"""``python -m dualize`` is ``dualize``."""

from .cli import main

if __name__ == "__main__":
    main()
