"""`python -m planner` runs the same commands as the installed `planner`."""

from planner.cli import main

raise SystemExit(main())
