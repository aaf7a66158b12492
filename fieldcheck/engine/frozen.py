"""Immutable value classes without generated code.

`dataclasses` builds its methods by running text, which the phone's Content-Security-Policy forbids,
and costs a third of a second to import there. This decorator gives the part of it that the engine uses.
"""


def frozen(*names, **defaults):
    """Class decorator: the named fields become read-only attributes, set by position or keyword.

    defaults: value of each field that may be left out. A class may define `check(self)`; it is called
    once the fields are set and raises an EngineError when they make no sense.
    Raises TypeError for missing, surplus or unknown fields.
    """

    def decorate(cls):
        count = len(names)

        def __init__(self, *args, **given):
            if len(args) > count:
                raise TypeError(cls.__name__ + " takes " + str(count) + " values, got " + str(len(args)))
            put = object.__setattr__
            for i, value in enumerate(args):
                put(self, names[i], value)
            for name in names[len(args):]:
                if name in given:
                    put(self, name, given.pop(name))
                elif name in defaults:
                    put(self, name, defaults[name])
                else:
                    raise TypeError(cls.__name__ + ": missing " + repr(name))
            if given:
                raise TypeError(cls.__name__ + ": unexpected " + repr(sorted(given)))
            check = getattr(self, "check", None)
            if check is not None:
                check()

        def __setattr__(self, name, value):
            raise AttributeError(cls.__name__ + " is frozen")

        def key(self):
            return tuple([getattr(self, name) for name in names])

        def __repr__(self):
            return cls.__name__ + "(" + ", ".join([n + "=" + repr(getattr(self, n)) for n in names]) + ")"

        def __eq__(self, other):
            return type(other) is type(self) and key(self) == key(other)

        def __hash__(self):
            return hash((cls.__name__, key(self)))

        def replace(self, **changes):
            fields = {name: getattr(self, name) for name in names}
            fields.update(changes)
            return cls(**fields)

        cls.__init__ = __init__
        cls.__setattr__ = __setattr__
        cls.__repr__ = __repr__
        cls.__eq__ = __eq__
        cls.__hash__ = __hash__
        cls.replace = replace
        cls.fields = names
        return cls

    return decorate
