"""What is audited: the code object of a function, and the size of one of its calls.

A target is a function, a method, or text "module:qualified.name", which also reaches a function that is defined
inside another: "harbour.routes:shortest.walk". Decorators that keep `__wrapped__` (functools.wraps, lru_cache) are
looked through, as the calls of the function itself are what is recorded.
"""

from __future__ import annotations

import functools
import importlib
import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import CodeType
from typing import Any, Final

#: Where the size of a call comes from: its arguments by name in, a number out.
Sizer = Callable[[Mapping[str, Any]], float]

_RECEIVERS: Final = ("self", "cls")
_BOXES: Final = (staticmethod, classmethod)


class TargetError(ValueError):
    """A target or a size that cannot be used. The message is whole sentences: what is wrong, how to mend it."""


@dataclass(frozen=True, slots=True)
class Target:
    """The function to audit: `code`, its name for reports, and the names of its arguments in order."""

    code: CodeType
    name: str

    @property
    def arguments(self) -> tuple[str, ...]:
        """Names as in the frame's locals; those of `*args` and `**kwargs` come last."""
        code = self.code
        count = code.co_argcount + code.co_kwonlyargcount
        count += bool(code.co_flags & inspect.CO_VARARGS) + bool(code.co_flags & inspect.CO_VARKEYWORDS)
        return code.co_varnames[:count]

    @property
    def operands(self) -> tuple[str, ...]:
        """The arguments without `self` or `cls`."""
        names = self.arguments
        return names[1:] if names and names[0] in _RECEIVERS else names

    @property
    def generator(self) -> bool:
        return bool(self.code.co_flags & inspect.CO_GENERATOR)


def resolve(target: object) -> Target:
    """The target that a function, a method, a code object or text stands for.

    Raises TargetError where there is no Python code to watch, or the text names nothing.
    """
    if isinstance(target, str):
        return _checked(_named(target), target.rpartition(":")[2])
    if isinstance(target, CodeType):
        return _checked(target, _name_of(target))
    code = _code_of(target)
    if code is None:
        raise TargetError(
            f"audit={_shown(target)} has no Python code whose calls could be watched; "
            'give a Python function, a method, or text such as "package.module:function"'
        )
    return _checked(code, str(getattr(inspect.unwrap(_unboxed(target)), "__qualname__", code.co_name)))


def inner(code: CodeType, name: str) -> CodeType | None:
    """The code of the function `name` that is defined inside `code`, at any depth; None where there is none."""
    nested = [constant for constant in code.co_consts if isinstance(constant, CodeType)]
    for constant in nested:
        if constant.co_name == name:
            return constant
    for constant in nested:
        found = inner(constant, name)
        if found is not None:
            return found
    return None


def _checked(code: CodeType, name: str) -> Target:
    if code.co_flags & (inspect.CO_COROUTINE | inspect.CO_ASYNC_GENERATOR):
        raise TargetError(f"{name} is async, and the calls of async functions cannot be audited yet")
    return Target(code, name.replace("<locals>.", ""))


def _name_of(code: CodeType) -> str:
    return str(getattr(code, "co_qualname", code.co_name))  # co_qualname is new in 3.11


def _unboxed(target: object) -> Any:
    while isinstance(target, (*_BOXES, functools.partial)):
        target = target.func if isinstance(target, functools.partial) else target.__func__
    return target


def _code_of(target: object) -> CodeType | None:
    target = _unboxed(target)
    if not callable(target):
        return None
    code = getattr(inspect.unwrap(target), "__code__", None)
    return code if isinstance(code, CodeType) else None


def _named(text: str) -> CodeType:
    module_name, colon, path = text.partition(":")
    if not colon or not module_name.strip() or not path.strip():
        raise TargetError(f'audit={text!r} is no target; write "package.module:function", or give the function itself')
    try:
        place: Any = importlib.import_module(module_name.strip())
    except ImportError as error:
        raise TargetError(f"audit={text!r}: the module {module_name!r} cannot be imported ({error})") from None
    so_far = module_name
    for part in (part for part in path.strip().split(".") if part != "<locals>"):
        found: Any = inner(place, part) if isinstance(place, CodeType) else getattr(place, part, None)
        if found is None:
            outer = _code_of(place)
            found = inner(outer, part) if outer is not None else None
        if found is None:
            raise TargetError(f"audit={text!r}: {so_far} has nothing named {part!r}")
        place, so_far = found, f"{so_far}.{part}"
    code = place if isinstance(place, CodeType) else _code_of(place)
    if code is None:
        raise TargetError(f"audit={text!r} names no Python function")
    return code


def _shown(target: object) -> str:
    return str(getattr(target, "__name__", None) or repr(target))[:60]


# ------------------------------------------------------------------ the size of a call


def sizer(target: Target, size_of: object = None) -> Sizer:
    """What gives the size of a call from its arguments.

    `size_of` None: the length of the first argument that has one, or the first whole number, whichever stands
    first. A callable whose parameters all bear names of the target's arguments gets those; one that takes a single
    argument (such as `len`) gets the first; any other gets all, in order, without `self`. Text
    "module:function" names the callable.

    Raises TargetError where `size_of` cannot be called so.
    """
    if size_of is None:
        return _default(target)
    function = _imported(size_of) if isinstance(size_of, str) else size_of
    if not callable(function):
        raise TargetError(f"size_of must be a function of the call's arguments, such as len; got {size_of!r}")
    call: Callable[..., Any] = function
    names = _parameters(call)
    if names and all(name in target.arguments for name in names):
        chosen = names
    elif not target.operands:
        raise TargetError(f"{target.name} takes no arguments, so that its calls have no size")
    elif names is None or len(names) == 1:
        chosen = target.operands[:1]
    else:
        chosen = target.operands
        if len(names) != len(chosen):
            raise TargetError(
                f"size_of takes {', '.join(names)}, but {target.name} has the arguments {', '.join(chosen)}; "
                "name its parameters after those it needs"
            )
    if len(chosen) == 1:
        (only,) = chosen
        return lambda arguments: float(call(arguments[only]))
    return lambda arguments: float(call(*[arguments[name] for name in chosen]))


def _parameters(function: Callable[..., Any]) -> tuple[str, ...] | None:
    """The names of the parameters that must be given; None where they cannot be told (some C functions)."""
    try:
        parameters = inspect.signature(function).parameters.values()
    except (TypeError, ValueError):
        return None
    kinds = (inspect.Parameter.POSITIONAL_ONLY, inspect.Parameter.POSITIONAL_OR_KEYWORD)
    return tuple(p.name for p in parameters if p.kind in kinds and p.default is p.empty)


def _default(target: Target) -> Sizer:
    names = target.operands
    if not names:
        raise TargetError(f"{target.name} takes no arguments, so that its calls have no size")

    def size(arguments: Mapping[str, Any]) -> float:
        for name in names:
            value = arguments[name]
            if isinstance(value, int) and not isinstance(value, bool):
                return float(value)
            if hasattr(value, "__len__"):
                return float(len(value))
        raise TargetError(
            f"no argument of {target.name} has a length or is a whole number; give size_of=, a function of its "
            f"arguments ({', '.join(names)})"
        )

    return size


def _imported(text: str) -> object:
    module_name, colon, path = text.partition(":")
    if not colon:
        raise TargetError(f'size_of={text!r} is no function; write "package.module:function"')
    try:
        place: Any = importlib.import_module(module_name)
        for part in path.split("."):
            place = getattr(place, part)
    except (ImportError, AttributeError) as error:
        raise TargetError(f"size_of={text!r} cannot be had: {error}") from None
    return place


__all__ = ["Sizer", "Target", "TargetError", "inner", "resolve", "sizer"]
