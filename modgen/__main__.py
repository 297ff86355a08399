"""``python -m modgen``."""

import sys

from modgen.cli import main

sys.exit(main())
