"""Run a notebook in a kernel of its own and write it with its outputs.

    python tests/notebook/run_notebook.py NOTEBOOK FOLDER

A program beside the tests, since its libraries leave sockets to the end of their process.  Kernel
and program talk through files in FOLDER, not through a network; the kernel ends with the program.
"""

from __future__ import annotations

import sys
from pathlib import Path

import nbformat
from jupyter_client import AsyncKernelManager
from nbclient import NotebookClient

LONGEST_CELL = 300
"""Seconds that a cell may take."""

# A kernel is ended from outside, so the workers of its runs would outlive it by minutes.
END_WORKERS = """
from sweep.engine.pool import end_workers
end_workers()
"""


def main(notebook: Path, folder: Path) -> None:
    """Run every cell in the folder; the first that fails ends it all."""
    content = nbformat.read(notebook, as_version=4)
    manager = AsyncKernelManager(
        kernel_name="python3", transport="ipc", connection_file=str(folder / "kernel.json")
    )
    client = NotebookClient(
        content, km=manager, timeout=LONGEST_CELL, resources={"metadata": {"path": str(folder)}}
    )
    *cells, last = content.cells = [*content.cells, nbformat.v4.new_code_cell(END_WORKERS)]
    with client.setup_kernel():
        try:
            for number, cell in enumerate(cells):
                client.execute_cell(cell, number)
        finally:
            client.execute_cell(last, len(cells))
    content.cells = cells
    nbformat.write(content, folder / notebook.name)


if __name__ == "__main__":
    main(Path(sys.argv[1]), Path(sys.argv[2]).resolve())
