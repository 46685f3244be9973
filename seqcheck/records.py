"""Data classes as the standard library makes them, for less: its module is not loaded, and nothing is compiled early.

The standard library writes and compiles up to eight methods for every class as it is defined, which for the classes
of this program took longer than a small proof. Here the classes share their methods, and `__init__` alone is compiled,
when a class has its first instance. What a class means is the same (tests/test_records.py holds them against twins of
the standard library), `dataclasses.fields` and `dataclasses.replace` take them, and a type checker sees the original.

Only what the house uses is here: `slots` always, `frozen`, `order`, `eq`, defaults and default factories.
"""

from operator import attrgetter
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from dataclasses import dataclass, field, replace
else:

    class _Made:
        """A default that is made anew for each instance."""

        def __init__(self, make):
            self.make = make

    def field(*, default_factory):
        """The default of a field that is made anew for each instance."""
        return _Made(default_factory)

    def replace(record, /, **changes):
        """A record with some of its fields changed."""
        return type(record)(**{name: getattr(record, name) for name in record.__match_args__} | changes)

    def dataclass(*, slots, frozen=False, order=False, eq=True):
        """Make a class a data class; see the module."""
        assert slots

        def made(said):
            return _made(said, frozen, order, eq)

        return made

    def _made(said, frozen, order, eq):
        names = tuple(said.__annotations__)  # of the class itself: no data class here has another as its base
        body = {name: one for name, one in said.__dict__.items() if name not in ("__dict__", "__weakref__")}
        defaults = {name: body.pop(name) for name in names if name in body}
        body |= {"__slots__": names, "__match_args__": names, "__said__": defaults, "__dataclass_fields__": _FIELDS}
        body |= {"__init__": _first_init, "__repr__": _repr}
        if eq:
            body |= {"__eq__": _eq, "__hash__": _hash if frozen else None, "__values__": staticmethod(_values(names))}
        if order:
            body |= {"__lt__": _lt, "__le__": _le, "__gt__": _gt, "__ge__": _ge}
        if frozen:
            body |= {"__setattr__": _setattr, "__delattr__": _delattr}
            body |= {"__getstate__": _getstate, "__setstate__": _setstate}
        whole = type(said)(said.__name__, said.__bases__, body)
        whole.__qualname__ = said.__qualname__
        return whole

    def _values(names):
        """The fields of a record as a tuple."""
        if len(names) > 1:
            return attrgetter(*names)
        return lambda record: tuple([getattr(record, name) for name in names])

    # The methods that all share

    def _first_init(self, *args, **kwargs):
        """Compile the `__init__` of a class, and go on with it."""
        cls = type(self)
        cls.__init__ = _compiled(cls)
        cls.__init__(self, *args, **kwargs)

    def _compiled(cls):
        names, defaults, frozen = cls.__match_args__, cls.__said__, cls.__setattr__ is _setattr
        known = {f"_default_{name}": one for name, one in defaults.items()}
        known |= {f"_set_{name}": cls.__dict__[name].__set__ for name in names}
        takes, does = ["self"], []
        for name in names:
            takes.append(f"{name}=_default_{name}" if name in defaults else name)
            value = name
            if isinstance(defaults.get(name), _Made):
                value = f"_default_{name}.make() if {name} is _default_{name} else {name}"
            does.append(f" _set_{name}(self, {value})" if frozen else f" self.{name} = {value}")
        exec(f"def __init__({', '.join(takes)}):\n" + "\n".join(does or [" pass"]), known)
        init = known["__init__"]
        init.__qualname__ = f"{cls.__qualname__}.__init__"
        return init

    def _repr(self):
        return f"{type(self).__qualname__}({', '.join(f'{one}={getattr(self, one)!r}' for one in self.__match_args__)})"

    def _eq(self, other):
        if other.__class__ is not self.__class__:
            return NotImplemented
        values = self.__values__
        return values(self) == values(other)

    def _hash(self):
        return hash(self.__values__(self))

    def _lt(self, other):
        return self.__values__(self) < other.__values__(other) if other.__class__ is self.__class__ else NotImplemented

    def _le(self, other):
        return self.__values__(self) <= other.__values__(other) if other.__class__ is self.__class__ else NotImplemented

    def _gt(self, other):
        return self.__values__(self) > other.__values__(other) if other.__class__ is self.__class__ else NotImplemented

    def _ge(self, other):
        return self.__values__(self) >= other.__values__(other) if other.__class__ is self.__class__ else NotImplemented

    def _setattr(self, name, value):
        _refuse(f"cannot assign to field {name!r}")

    def _delattr(self, name):
        _refuse(f"cannot delete field {name!r}")

    def _refuse(text):
        from dataclasses import FrozenInstanceError

        raise FrozenInstanceError(text)

    def _getstate(self):
        return [getattr(self, name) for name in self.__match_args__]

    def _setstate(self, state):
        for name, value in zip(self.__match_args__, state, strict=True):
            object.__setattr__(self, name, value)

    class _Fields:
        """What `dataclasses` asks of a class, worked out when it does."""

        def __get__(self, record, cls):
            import dataclasses

            said = []
            for name, kind in cls.__annotations__.items():
                given = cls.__said__.get(name, dataclasses.MISSING)
                how = {"default_factory": given.make} if isinstance(given, _Made) else {"default": given}
                said.append((name, kind, dataclasses.field(**how)))
            cls.__dataclass_fields__ = dataclasses.make_dataclass(cls.__name__, said).__dataclass_fields__
            return cls.__dataclass_fields__

    _FIELDS = _Fields()


__all__ = ["dataclass", "field", "replace"]
