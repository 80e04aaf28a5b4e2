"""The notebook: one SQLite file that loses nothing that was kept."""

from fieldapp.notebook.errors import NotebookError
from fieldapp.notebook.opening import Opening, OpeningReport, open_notebook
from fieldapp.notebook.store import Notebook

__all__ = ["Notebook", "NotebookError", "Opening", "OpeningReport", "open_notebook"]
