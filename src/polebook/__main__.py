"""`python -m polebook` is `polebook`."""

import sys

from polebook.cli.main import main

sys.exit(main())
