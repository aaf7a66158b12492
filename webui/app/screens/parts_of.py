"""Words about steps and items that several screens share."""


def consequence(step):
    """What leaving a step out does to the outcome."""
    if step.get("hold") or step.get("safety"):
        return "Left out, the item can only be unserviceable or not examined."
    if step["phase"] in ("as left", "close"):
        return "Left out, the item is at best serviceable with restrictions."
    return "What hangs on it is then not judged, and the record says so."


STATES = {"to do": "to do", "taken": "done", "left": "not done"}


def instance_line(instance):
    """The title of an instance with its round."""
    number = instance.round
    return instance.step["title"] + (", round " + str(number) if number else "")
