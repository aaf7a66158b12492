"""A photograph: taken with the phone's camera, kept as it is, named by its digest."""

from browser import window

from fieldcheck.engine.errors import EntryError

from .. import dom
from ..markup import NOTHING, field, h, join
from .step import Step

platform = window.platform


def camera(name="file", label="Take or pick a photograph"):
    """The input that opens the camera."""
    return h("p.field", h("label.camera", {"for": name}, label),
             h("input", {"type": "file", "id": name, "name": name, "accept": "image/*", "capture": "environment"}))


class Photo(Step):
    """The photograph of a step, with a caption."""

    quick = True

    def inputs(self):
        return join([camera(), h("div", {"id": "preview"}, NOTHING),
                     field("Caption", "caption", self.draft.get("caption") or "")])

    async def on_file(self, name, file):
        self.keep("blob", await platform.putBlob(file))
        await self.show_picture(self.draft["blob"])

    async def show_picture(self, blob):
        url = await platform.getBlob(blob)
        if url:
            dom.fill("preview", h("img.photo", {"src": url, "alt": self.draft.get("caption") or "Photograph"}))

    def shown(self):
        Step.shown(self)
        from browser import aio
        answer = self.answer()
        blob = self.draft.get("blob")
        if self.mode == "taken" and answer is not None:
            blob = answer.value.get("blob")
        if blob:
            aio.run(self.show_picture(blob))

    def taken(self):
        return join([Step.taken(self), h("div", {"id": "preview"}, NOTHING)])

    def value(self, arg):
        if not self.draft.get("blob"):
            raise EntryError("there is no photograph yet", "", "take one, or note the step as not done")
        return {"blob": self.draft["blob"], "caption": dom.value("caption").strip()}
