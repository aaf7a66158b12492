"""The errors of the house. Each says what is wrong, where, and how to mend it; the texts are part of the API."""


class FieldcheckError(Exception):
    """what: one sentence. where: file and line, field or event, or "". mend: how to put it right, or ""."""

    def __init__(self, what, where="", mend=""):
        Exception.__init__(self, what)
        self.what = what
        self.where = where
        self.mend = mend

    def __str__(self):
        text = self.what if self.where == "" else self.where + ": " + self.what
        return text if self.mend == "" else text + "\n    " + self.mend

    def as_dict(self):
        """The one shape in which errors travel over HTTP and between the runtimes."""
        return {"what": self.what, "where": self.where, "mend": self.mend}


class EntryError(FieldcheckError):
    """What was typed is not a value that is allowed here.  choices: texts to pick from, where it can be read in two
    ways."""

    choices = ()


class UnitError(FieldcheckError):
    """A unit is unknown, or two quantities do not have the same dimension."""


class OutOfRange(FieldcheckError):
    """An argument lies outside the range for which a function is documented."""


class RuleError(FieldcheckError):
    """A rule file does not say something that can be carried out."""


class EventError(FieldcheckError):
    """An event's text is malformed, too large, altered or out of order."""


class ProofError(FieldcheckError):
    """A hash, signature or proof does not show what it should."""


class NotFound(FieldcheckError):
    """There is no such thing."""
