"""Makes the README's pictures anew: flowsheets/pictures/*.png, parts of the pages of the examples. Run by hand when a page's look changes.

usage: /usr/bin/python3 make_pictures.py LEAT_BINARY
"""
import base64
import os
import shutil
import subprocess
import sys
import tempfile

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "abuse"))
from browser import Browser  # noqa: E402
from command_support import FLOWSHEETS  # noqa: E402

PICTURES = os.path.join(FLOWSHEETS, "pictures")
WIDTH = 1100


def picture(browser, page_file, name, first, last, tone="light"):
    """The page from the top of one element to the bottom of another, as a picture."""
    page = browser.open(page_file, width=WIDTH, dark=tone == "dark")
    box = page.value(f"""(() => {{
      const first = document.querySelector({first!r}), last = document.querySelector({last!r});
      if (!first || !last) return null;
      const top = first.getBoundingClientRect().top + scrollY;
      return {{ top, height: last.getBoundingClientRect().bottom + scrollY - top }}; }})()""")
    if not box:
        sys.exit(f"{page_file}: no {first} or no {last}")
    area = {"x": 0, "y": max(0, box["top"] - 10), "width": WIDTH, "height": box["height"] + 20, "scale": 1}
    shot = page.call("Page.captureScreenshot", format="png", clip=area, captureBeyondViewport=True)
    with open(os.path.join(PICTURES, name + ".png"), "wb") as file:
        file.write(base64.b64decode(shot["data"]))


def main():
    leat = os.path.abspath(sys.argv[1])
    os.makedirs(PICTURES, exist_ok=True)
    folder = tempfile.mkdtemp(prefix="leat_pictures_")
    shutil.copytree(FLOWSHEETS, os.path.join(folder, "flowsheets"))

    def say(*words):
        subprocess.run([leat, *words], cwd=folder, check=True, capture_output=True)

    say("run", "flowsheets/1_ammine_residue.yaml")
    say("report", "outputs/1_ammine_residue.h5")
    say("ladder", "flowsheets/ladder_three_lixiviants.yaml")
    say("campaign", "flowsheets/campaign_ammine_wash.yaml")
    say("report", "outputs/campaign_ammine_wash.ledger")
    outputs = os.path.join(folder, "outputs")
    browser = Browser()
    try:
        run = os.path.join(outputs, "1_ammine_residue.html")
        picture(browser, run, "page", "body", "#figure-where-metal-goes")
        picture(browser, run, "diagram", "#flow", "#flow")
        picture(browser, os.path.join(outputs, "ladder_three_lixiviants.ladder.html"), "ladder", "#figure-recovery-by-step", "#figure-recovery-by-step")
        picture(browser, os.path.join(outputs, "campaign_ammine_wash.html"), "campaign", "#trade", "#trade")
    finally:
        browser.close()
        shutil.rmtree(folder)


if __name__ == "__main__":
    main()
