"""`python -m tidekit` is the `tidekit` command."""

from tidekit.cli.main import main

raise SystemExit(main())
