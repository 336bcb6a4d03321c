"""`python -m revsynth`."""

from revsynth.cli.main import run

run()
