"""`python -m assayfolio`."""

from assayfolio.cli.root import main

main()
