"""``python -m lowpoint``."""

import sys

from lowpoint.faces.cli import main

sys.exit(main())
