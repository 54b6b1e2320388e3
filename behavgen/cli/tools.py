ABOUT = "x"
ARGUMENTS = ""
EXAMPLE = "behavgen tools"


def add_arguments(parser):
    pass
