ABOUT="a"
ARGUMENTS="[CELL ...]"
EXAMPLE="behavgen fit latch_a"
def add_arguments(parser):
    parser.add_argument("cells", nargs="*", metavar="CELL", help="cells; all when none is named")
