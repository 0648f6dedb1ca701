"""Entry point of `python -m libtool`."""

from libtool.cli import run

if __name__ == "__main__":
    run()
