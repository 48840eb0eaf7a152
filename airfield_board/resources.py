"""Where the files that come with the program lie: in a clone beside the package, in an installed one inside it."""

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent


def bundled_folder(name: str) -> Path:
    """Return the folder ``assets`` or ``demo_data``.

    Parameters
    ----------
    name
        The folder's name.

    Raises
    ------
    FileNotFoundError
        Where the program was installed without it.
    """
    for parent in (_PACKAGE.parent, _PACKAGE):
        folder = parent / name
        if folder.is_dir() and (parent == _PACKAGE or (parent / "pyproject.toml").is_file()):
            return folder
    raise FileNotFoundError(f"the folder {name} that comes with Airfield Board is missing")
