"""Sizing of fiberscopes: light on the target, smallest detail, fit and passage, each number with its source.

>>> import optics
>>> optics.size(optics.load("gearbox_tooth")).name
'Gearbox tooth check'
"""

# The public names and the module each lives in; nothing heavy is imported until one is asked for.
PUBLIC = {
    "size": "optics.report.size",
    "load": "optics.presets",
    "Fiberscope": "optics.fiberscope",
    "Report": "optics.report.answer",
    "OutOfRange": "optics.spec",
    "Caveat": "optics.spec",
    "Needs": "optics.needs",
    "Summary": "optics.needs",
    "columns": "optics.chain.columns",
    "evaluate": "optics.chain.evaluate",
    "resolve": "optics.presets",
    "edited": "optics.presets",
}
__all__ = list(PUBLIC)


def __getattr__(name: str):
    import importlib

    if name not in PUBLIC:
        raise AttributeError(f"optics has no {name!r}; it offers {', '.join(PUBLIC)}.")
    return getattr(importlib.import_module(PUBLIC[name]), name)


def __dir__():
    return sorted(PUBLIC)
