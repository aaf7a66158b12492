"""What every screen is: words and keys built from the state; the frame around them is drawn by app.main."""

from . import dom


class Screen:
    """One screen.  place: its address as segments.  Subclasses give body() and may give on_<do>(arg) for their keys,
    typed(name, text), on_file(name, file), pointer(kind, x, y), leave().

    supply: supply state shown along the top, "" where there is none; entries: number of open entries;
    thumb: (label, do) of the one wide key, or None; ruler: Html along the lower edge, or None.
    """

    name = ""
    supply = ""
    entries = 0
    thumb = None
    ruler = None
    main = None
    stale_on_change = True

    def __init__(self, place):
        self.place = place

    def body(self):
        """The screen's Html."""
        raise NotImplementedError

    def shown(self):
        """Called once the screen stands in the page."""

    def leave(self):
        """Called before another screen takes its place."""

    def typed(self, name, text):
        """A field changed."""

    def on_key(self, key, repeated):
        """Space or Enter of a keyboard or foot switch does what the thumb does; True when it was used."""
        if repeated or self.thumb is None or key not in ("Enter", " "):
            return False
        self.main.do(self.thumb[1], "")
        return True

    def pointer(self, kind, x, y):
        """A finger on the pad that the screen follows."""

    def on_file(self, name, file):
        """A file was picked."""

    def on_back(self, arg):
        dom.back()
