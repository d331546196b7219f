"""`python -m plumbrule_core.headless`: the same as the command `plumbrule`."""

import sys

from plumbrule_core.headless import main

sys.exit(main())
