"""Which of several posts is meant, by what a user writes of one."""

from __future__ import annotations

from polebook.problem import Place, Problem, ProblemsFound
from polebook.record.posted import Post
from polebook.record.posted_names import record_of
from polebook.refusal import quoted

_MOST_DIGITS = 5  # of a number; more are the beginning of a digest


def chosen(posts: tuple[Post, ...], which: str, file: str) -> Post:
    """The post of `file` that `which` names: its number (1 the newest), its date, or the beginning of its digest.

    Raises ProblemsFound where none is named so.
    """
    word = which.strip().lower()
    if not posts:
        raise ProblemsFound([Problem(Place(file), "nothing is posted of this file", f"there is no {record_of(file)}",
                                     f'post it first: polebook post {file} -m "why"')])
    if word.isdecimal() and word.isascii() and len(word) <= _MOST_DIGITS:
        found = [post for number, post in enumerate(posts, 1) if number == int(word)]
    else:
        found = [post for post in posts if post.date.isoformat() == word] or [
            post for post in posts if word and post.digest.startswith(word)]
    if not found:
        have = f"there are {len(posts)}, of {posts[-1].date} to {posts[0].date}"
        raise ProblemsFound([Problem(
            Place(record_of(file)), f"there is no post {quoted(which)}",
            have if len(posts) > 1 else f"the only one is of {posts[0].date}",
            "name its number, 1 for the newest, its date, or the beginning of its digest; "
            f"polebook post {file} --list shows them")])
    return found[0]
