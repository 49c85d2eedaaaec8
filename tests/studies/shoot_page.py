"""Takes screenshots of the page in a headless browser, at phone and desktop width, in both themes.

    python tests/studies/shoot_page.py PAGE.html FOLDER

Needs Chromium (Debian: chromium) and node's `playwright-core` beside it, or where NODE_PATH points. Prints what the
browser's console says, requests that left the file, and elements wider than the window; exit code 1 for any.
"""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

BROWSERS = ("chromium", "chromium-browser", "google-chrome")
#: Without these a browser looks for hosts of its maker at every start.
FLAGS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)
WIDTHS = {"phone": (390, 844), "desktop": (1280, 900)}

SCRIPT = """
const { chromium } = require("playwright-core");
const [browser, flags, page, folder, widths] = JSON.parse(process.argv[1]);
(async () => {
  const run = await chromium.launch({ executablePath: browser, args: flags });
  const found = [];
  for (const [name, [width, height]] of Object.entries(widths)) {
    for (const colorScheme of ["light", "dark"]) {
      const context = await run.newContext({ viewport: { width, height }, colorScheme });
      const tab = await context.newPage();
      const where = `${name}, ${colorScheme}: `;
      tab.on("console", (message) => found.push(where + message.text()));
      tab.on("pageerror", (error) => found.push(where + error));
      tab.on("request", (request) => {
        if (!/^(file|data):/.test(request.url())) found.push(where + "asked for " + request.url());
      });
      await tab.goto(page);
      const wide = await tab.evaluate(() => document.documentElement.scrollWidth - innerWidth);
      if (wide > 0) found.push(where + `the page is ${wide} px wider than the window`);
      await tab.screenshot({ path: `${folder}/${name}-${colorScheme}.png` });
      const first = await tab.$("details.budget");
      if (first) {
        await tab.evaluate(() => { document.querySelector("details.budget").open = true; });
        await first.screenshot({ path: `${folder}/${name}-${colorScheme}-budget.png` });
      }
      await context.close();
    }
  }
  await run.close();
  console.log(JSON.stringify(found));
})().catch((error) => { console.error(String(error)); process.exit(2); });
"""


def browser() -> str | None:
    """The path of a browser on this machine."""
    return next((path for name in BROWSERS if (path := shutil.which(name))), None)


def shoot(page: Path, folder: Path) -> list[str]:
    """Take the screenshots; what was wrong. Raises RuntimeError where browser or driver is missing or fails."""
    found, node = browser(), shutil.which("node")
    if found is None or node is None:
        raise RuntimeError("needs chromium and node")
    folder.mkdir(parents=True, exist_ok=True)
    argument = json.dumps([found, FLAGS, page.resolve().as_uri(), str(folder), WIDTHS])
    run = subprocess.run(
        [node, "-e", SCRIPT, argument], capture_output=True, text=True, timeout=180, env=dict(os.environ), check=False
    )
    if run.returncode:
        raise RuntimeError(run.stderr.strip())
    answer: list[str] = json.loads(run.stdout)
    return answer


def main() -> int:
    if len(sys.argv) != 3:
        print(__doc__)
        return 2
    try:
        wrong = shoot(Path(sys.argv[1]), Path(sys.argv[2]))
    except RuntimeError as error:
        print(error, file=sys.stderr)
        return 2
    print("\n".join(wrong) or "nothing on the console, no request, no overflow")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
