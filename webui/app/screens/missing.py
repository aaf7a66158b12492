"""An address that leads nowhere now."""

from .. import dom
from ..markup import h
from ..screen import Screen


class Missing(Screen):
    """One sentence and the way back."""

    name = "Nothing here"

    def __init__(self, place, sentence):
        Screen.__init__(self, place)
        self.sentence = sentence
        self.thumb = ("To the jobs", "jobs")

    def body(self):
        return h("div.screen", h("h1", "Nothing here"), h("p.do", self.sentence))

    def on_jobs(self, arg):
        dom.go("#/")
