"""`python -m coldwork`."""

from coldwork.cli import main

if __name__ == "__main__":
    main()
