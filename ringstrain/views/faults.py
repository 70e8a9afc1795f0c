"""Errors in three lines: what was asked, what is wrong with it, what to do."""

from __future__ import annotations

from ringstrain.errors import RingstrainError, StereoError

_ROOM = 96


def fault_lines(error: RingstrainError, asked: str = "") -> tuple[str, ...]:
    """The lines of an error message, most important last.

    Parameters
    ----------
    error
        What went wrong.
    asked
        The input, for errors that do not carry it.

    Returns
    -------
    tuple of str
        What was asked (when known), what is wrong with carets under every place, what to do.
    """
    spans = error.spans if isinstance(error, StereoError) else ()
    if not spans and error.span is not None:
        spans = (error.span,)
    text = error.text if error.text is not None else asked
    body = [error.problem]
    if text.strip() and "\n" not in text.strip():
        shown, marks = _window(text, spans)
        body = [shown, f"{marks}  {error.problem}" if marks.strip() else error.problem]
    return (*body, error.next_step) if error.next_step else tuple(body)


def _window(text: str, spans: tuple[tuple[int, int], ...]) -> tuple[str, str]:
    """The part of a text around its spans, and carets below them."""
    start, end = 0, len(text)
    if end > _ROOM:
        first = min((s for s, _ in spans), default=0)
        start = max(0, min(first - _ROOM // 3, end - _ROOM))
        end = start + _ROOM
    head, tail = "..." if start else "", "..." if end < len(text) else ""
    carets = [" "] * (end - start)
    for begin, stop in spans:
        for place in range(max(begin, start), min(max(stop, begin + 1), end)):
            carets[place - start] = "^"
        if begin == end == len(text):
            carets.append("^")
    marks = (" " * len(head) + "".join(carets)).rstrip()
    return head + text[start:end] + tail, marks
