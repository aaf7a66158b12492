"""The same loop in every runtime: a list of cases in, a list of texts out."""


def answers(run, cases):
    """run(case) of each case, as text; an exception as "E:Class:text"."""
    found = []
    for case in cases:
        try:
            found.append(run(case))
        except Exception as error:
            found.append("E:" + type(error).__name__ + ":" + str(error))
    return found
