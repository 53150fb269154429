"""``python -m reportgen``: the same commands as the installed script."""

from reportgen.cli import main

main(prog_name="reportgen")
