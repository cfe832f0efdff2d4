"""`python -m holdsteady`."""

from holdsteady.cli import main

if __name__ == "__main__":
    main()
