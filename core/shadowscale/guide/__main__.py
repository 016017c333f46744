"""Write `quantities.md` again from the register: `python -m shadowscale.guide`."""

from __future__ import annotations

from pathlib import Path

from shadowscale.guide import quantities_page

if __name__ == "__main__":
    Path(__file__).with_name("quantities.md").write_text(quantities_page(), encoding="utf-8")
