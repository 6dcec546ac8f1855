"""`python -m lasescatter`."""

from lasescatter.commands.app import main

main()
