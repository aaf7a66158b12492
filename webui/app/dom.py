"""The only room that knows the document: the frame of the page, its listeners, timers, the address."""

from browser import document, window

DIGITS = ("0", "1", "2", "3", "4", "5", "6", "7", "8", "9", "-", ".", ",")
handlers = {}
"""kind -> function: "do" (name, arg), "typed" (name, text), "key" (key, repeated) -> True when used, "place" (),
"file" (name, file), "pointer" (kind, x, y), "seen" ()."""


def start():
    """Builds the frame of the page and listens."""
    document.body.innerHTML = ('<a class="skip" href="#main" tabindex="-1">To the step</a>'
                               '<header id="top"></header><main id="main" tabindex="0"></main>'
                               '<footer id="foot"></footer><p id="said" class="said" role="status"></p>')
    document.addEventListener("click", _click)
    document.addEventListener("input", _input)
    document.addEventListener("change", _change)
    document.addEventListener("keydown", _keydown)
    window.addEventListener("hashchange", _place)
    document.addEventListener("visibilitychange", _seen)


def _click(event):
    try:
        target = event.target.closest("[data-do]")
    except KeyError:                    # Brython's own closest() says so where there is none
        return
    event.preventDefault()
    if target.getAttribute("aria-disabled") == "true":
        return
    handlers["do"](target.getAttribute("data-do"), target.getAttribute("data-arg") or "")


def _input(event):
    target = event.target
    if target.name:
        handlers["typed"](target.name, str(target.value))


def _change(event):
    target = event.target
    if target.type == "file" and target.files.length:
        handlers["file"](target.name, target.files[0])
    elif target.tagName == "SELECT" and target.name:
        handlers["typed"](target.name, str(target.value))


def _keydown(event):
    if event.ctrlKey or event.altKey or event.metaKey or event.isComposing:
        return
    key = event.key
    kind = event.target.tagName
    if key not in ("Enter", " "):
        if key in DIGITS and kind in ("BODY", "MAIN"):
            handlers["key"](key, False)
        return
    if kind in ("BUTTON", "A", "TEXTAREA", "SELECT", "SUMMARY"):
        return
    if kind == "INPUT" and (key == " " or event.target.type == "file"):
        return
    if handlers["key"](key, bool(event.repeat)):
        event.preventDefault()


def _place(event):
    handlers["place"]()


def _seen(event):
    if document.visibilityState == "visible":
        handlers["seen"]()


def visible():
    """True while a person can see the page."""
    return document.visibilityState == "visible"


def find(name):
    """The element of that id, or None."""
    found = document.getElementById(name)
    return found if found else None


def fill(name, html):
    """Replaces what an element holds; nothing happens where there is no such element."""
    found = document.getElementById(name)
    if found:
        found.innerHTML = html.text


def append(name, html):
    """Adds to what an element holds."""
    found = document.getElementById(name)
    if found:
        found.insertAdjacentHTML("beforeend", html.text)


def text(name, words):
    """Replaces the words of an element."""
    found = document.getElementById(name)
    if found:
        found.textContent = words


def value(name):
    """What stands in a field, or ""."""
    found = document.getElementById(name)
    return str(found.value) if found else ""


def set_value(name, words):
    """Puts a text into a field."""
    found = document.getElementById(name)
    if found:
        found.value = words


def insert(name, words):
    """Puts characters where the cursor stands in a field, and leaves the cursor behind them."""
    found = document.getElementById(name)
    if found:
        found.setRangeText(words, found.selectionStart, found.selectionEnd, "end")
        found.focus()


def chosen(name):
    """The value of the chosen radio key of that name, or ""."""
    found = document.querySelector('input[name="' + name + '"]:checked')
    return str(found.value) if found else ""


def focus(name):
    """Moves the focus to an element."""
    found = document.getElementById(name)
    if found:
        found.focus({"preventScroll": True})
        if found.tagName == "INPUT" and found.type == "text":
            end = len(str(found.value))
            found.setSelectionRange(end, end)


def mark(name, cls, on):
    """Adds or removes a class of an element."""
    found = document.getElementById(name)
    if found:
        if on:
            found.classList.add(cls)
        else:
            found.classList.remove(cls)


def attribute(name, which, words):
    """Sets an attribute of an element."""
    found = document.getElementById(name)
    if found:
        found.setAttribute(which, words)


def scroll_up():
    """Shows the top of the screen."""
    document.getElementById("main").scrollTop = 0


def title(words):
    """The name of the page, for the list of windows and for screen readers."""
    document.title = words


def say(words):
    """Tells a screen reader, and nobody else."""
    text("said", words)


# ---- the address ------------------------------------------------------------------------------------------------

def place():
    """The segments of the address behind #/."""
    raw = str(window.location.hash)
    if not raw.startswith("#/"):
        return []
    return [str(window.decodeURIComponent(one)) for one in raw[2:].split("/") if one]


def go(hash_text, instead=False):
    """Moves to another screen; instead: the present one leaves no trace for the back button."""
    if instead:
        window.location.replace(hash_text)
    else:
        window.location.hash = hash_text


def rename(hash_text):
    """The present screen has another address from now on; nothing is shown anew."""
    window.history.replaceState("", "", hash_text)


def back():
    """As the back button."""
    window.history.back()


# ---- time -------------------------------------------------------------------------------------------------------

def later(milliseconds, act):
    """Calls act once; returns what cancel() takes."""
    return window.setTimeout(act, milliseconds)


def cancel(timer):
    """Forgets a call of later()."""
    if timer is not None:
        window.clearTimeout(timer)


def after_paint(act):
    """Calls act once what has been put on the page is on the glass."""
    def painted(moment):
        window.setTimeout(act, 0)
    if document.visibilityState == "visible":
        window.requestAnimationFrame(painted)
    else:
        window.setTimeout(act, 0)


# ---- drawing with a finger --------------------------------------------------------------------------------------

def follow_pointer(name):
    """From now on the pointer over an element is reported: ("down" | "move" | "up", x, y), whole numbers of px."""
    pad = document.getElementById(name)

    def told(kind):
        def tell(event):
            event.preventDefault()
            box = pad.getBoundingClientRect()
            if kind == "down":
                pad.setPointerCapture(event.pointerId)
            x = int(event.clientX - box.left)
            y = int(event.clientY - box.top)
            handlers["pointer"](kind, x, y)
        return tell

    pad.addEventListener("pointerdown", told("down"))
    pad.addEventListener("pointermove", told("move"))
    pad.addEventListener("pointerup", told("up"))


def picture(name):
    """Address of a drawing of ours by its file name, or ""."""
    pictures = window.fieldcheckChunks.build.pictures
    found = pictures[name] if name in pictures.to_dict() else ""
    return str(found)
