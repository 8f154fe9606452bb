"""`python -m reactorstage`."""

from reactorstage.commands import main

if __name__ == "__main__":
    main()
