"""What git leaves out of a tree: files that are untracked and ignored at the same time.

Only the ``.gitignore`` files of the tree count, which are part of what is reviewed; rules that a
machine or a user keeps elsewhere do not, so that everybody reviews the same files. Where git is
missing, refuses or has no repository, nothing is left out.
"""

import os
import subprocess

_LIST = (
    "git",
    "-c",
    "core.fsmonitor=false",
    "ls-files",
    "-z",
    "--others",
    "--ignored",
    "--directory",
    "--exclude-per-directory=.gitignore",
)
_PATIENCE = 120
"""Seconds after which everything is read: a tree can keep git waiting, and then counts as
unmanaged."""


def ignored_below(directory: str) -> frozenset[str]:
    """The ignored files and directories below ``directory``, relative to it, not what is in them.

    Empty where the directory is ignored as a whole: who names it wants it read.
    """
    environment = {key: value for key, value in os.environ.items() if not key.startswith("GIT_")}
    try:
        done = subprocess.run(
            _LIST,
            cwd=directory,
            env=environment | {"GIT_OPTIONAL_LOCKS": "0"},
            stdin=subprocess.DEVNULL,
            capture_output=True,
            timeout=_PATIENCE,
            check=True,
        )
    except (OSError, ValueError, subprocess.SubprocessError):
        return frozenset()
    paths = frozenset(os.fsdecode(path.rstrip(b"/")) for path in done.stdout.split(b"\0") if path)
    return frozenset() if "." in paths else paths
