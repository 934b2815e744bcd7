"""The README keeps its promises: it opens with the job, its commands exist, and its example runs as printed."""

from __future__ import annotations

import os
import re
import subprocess
import sys


def test_it_opens_with_the_job(root):
    """Title, then one paragraph on who works with mutual inductance and what they must get done."""
    paragraphs = (root / "README.md").read_text(encoding="utf-8").strip().split("\n\n")
    assert "# interwind" == paragraphs[0]
    assert "mutual inductance" in paragraphs[1]


def test_both_commands_exist(root):
    """The demonstration and the tests are one command each, and the README names them."""
    text = (root / "README.md").read_text(encoding="utf-8")
    for command in ("deploy/demo.sh", "deploy/test.sh"):
        assert f"bash {command}" in text
        assert os.access(root / command, os.X_OK)


def test_its_links_lead_somewhere(root):
    """Every relative link of every guide points at a file or folder of the project."""
    lost = []
    for guide in (root / "README.md", root / "DEVELOPERS.md", *root.glob("*/README.md")):
        for target in re.findall(r"\]\(([^)#:]+)\)", guide.read_text(encoding="utf-8")):
            if not (guide.parent / target).exists():
                lost.append(f"{guide.relative_to(root)}: {target}")
    assert [] == lost


def test_its_example_runs(root, tmp_path):
    """The first Python block runs as printed and prints a verdict."""
    code = re.search(r"```python\n(.*?)```", (root / "README.md").read_text(encoding="utf-8"), re.DOTALL).group(1)
    ran = subprocess.run(
        [sys.executable, "-W", "error", "-c", code], cwd=tmp_path, capture_output=True, text=True, timeout=60
    )
    assert 0 == ran.returncode, ran.stderr
    assert "Verdict.VALID" in ran.stdout
