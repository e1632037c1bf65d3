#!/usr/bin/env bash
# The client against Neovim itself: run.sh PROGRAM [NVIM]. What is checked is what is drawn.
set -uo pipefail
here=$(cd "$(dirname "$0")" && pwd)
root=$(cd "$here/../../.." && pwd)
program=$(cd "$(dirname "$1")" && pwd)/$(basename "$1")
nvim=${2:-nvim}
if ! command -v "$nvim" >/dev/null; then
  echo "not run: the client for Neovim (no nvim)"
  exit 0
fi
folder=$(mktemp -d)
trap '[ -n "${LEASTWISE_KEEP:-}" ] || rm -rf "$folder"' EXIT
cp "$root/grammar/examples/shaft_winch.least" "$folder/winch.least"
export XDG_CONFIG_HOME=$folder/config XDG_DATA_HOME=$folder/data XDG_STATE_HOME=$folder/state XDG_CACHE_HOME=$folder/cache
export LEASTWISE_RUNTIME=$root/editors/neovim LEASTWISE_FOLDER=$folder
LEASTWISE_PROGRAM=$program timeout 120 "$nvim" --headless -u NONE -i NONE -n -S "$here/drive.lua" </dev/null >"$folder/log" 2>&1
status=$?
LEASTWISE_PROGRAM=$folder/nothing timeout 60 "$nvim" --headless -u NONE -i NONE -n -S "$here/missing.lua" </dev/null >>"$folder/log" 2>&1
cat "$folder/log"
# Neovim's own messages may stand before ours on a line.
good=$(grep -c 'PASS ' "$folder/log")
bad=$(grep -c 'FAIL ' "$folder/log")
[ "$status" -eq 0 ] || bad=$((bad + 1))
printf '%d passed, %d failed\n' "$good" "$bad"
[ "$bad" -eq 0 ] && [ "$good" -gt 0 ]
