"""``python -m conjcheck``: the same as the command ``conjcheck``."""

from conjcheck.cli import main

__all__ = ["main"]

if __name__ == "__main__":
    main(prog_name="conjcheck")
