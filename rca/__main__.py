"""``python -m rca`` is the same program as ``rca``."""

from rca.cli.main import main

if __name__ == "__main__":
    main()
