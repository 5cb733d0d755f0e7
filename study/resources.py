"""Where the templates and the demonstration workbooks lie."""

from __future__ import annotations

from pathlib import Path


def resource_dir(name: str) -> Path:
    """Return the folder of that name: inside the installed package, or at the top of a checkout.

    Parameters
    ----------
    name : str
        ``templates`` or ``workbooks``.

    Returns
    -------
    Path
        An existing folder.

    Raises
    ------
    FileNotFoundError
        Neither place has it: the installation is not whole.

    Examples
    --------
    >>> resource_dir("workbooks").name
    'workbooks'
    """
    package = Path(__file__).parent
    for folder in (package / name, package.parent / name):
        if folder.is_dir():
            return folder
    raise FileNotFoundError(f"the folder {name} is missing; install the program again")
