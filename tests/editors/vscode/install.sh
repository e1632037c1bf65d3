#!/usr/bin/env bash
# Installs what the test of the Visual Studio Code client needs into a folder: code-server, which is Visual Studio Code
# behind a web page, a driver for Chromium, and the editor's own reader of TextMate grammars.
#
#   install.sh [FOLDER]        default: $CARGO_TARGET_DIR/editors/vscode or target/editors/vscode
#
# Does nothing where it has run before. Needs npm; Debian's packages are installed where this runs as root.
# LEASTWISE_EDITORS_LOG names a file for what npm and the compilers say; else it is kept in the folder.
set -euo pipefail
here=$(cd "$(dirname "$0")" && pwd)
root=$(cd "$here/../../.." && pwd)
folder=${1:-${CARGO_TARGET_DIR:-$root/target}/editors/vscode}

# Chromium shows the editor, ripgrep is its search, the others compile its native modules; the fonts have the letters.
packages=(chromium ripgrep libkrb5-dev g++ make python3 fonts-dejavu-core fonts-jetbrains-mono)

mkdir -p "$folder"
folder=$(cd "$folder" && pwd)
log=${LEASTWISE_EDITORS_LOG:-$folder/install.log}
stamp=$folder/installed
wanted=$(cat "$here/install.sh" "$here/package.json" "$here/package-lock.json" | sha256sum)
client=$root/editors/vscode
tools_are_there() {
  [ -x "$client/node_modules/.bin/esbuild" ] && [ ! "$client/package-lock.json" -nt "$client/node_modules/.package-lock.json" ]
}
if [ "$(cat "$stamp" 2>/dev/null)" = "$wanted" ] && tools_are_there; then
  echo "installed already: $folder"
  exit 0
fi
rm -f "$stamp"

fail() {
  echo "not installed: $1 (see $log)" >&2
  exit 1
}

missing=()
for package in "${packages[@]}"; do
  dpkg-query -W -f '${Status}' "$package" 2>/dev/null | grep -q 'ok installed' || missing+=("$package")
done
if [ "${#missing[@]}" -gt 0 ]; then
  if [ "$(id -u)" = 0 ] && command -v apt-get >/dev/null; then
    echo "installing ${missing[*]}"
    { apt-get update -qq && DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "${missing[@]}"; } \
      >"$log" 2>&1 || fail "Debian packages ${missing[*]}"
  else
    echo "not installed, which may do: ${missing[*]}" >&2
  fi
fi
command -v npm >/dev/null || fail "npm is missing; Node.js 20 brings it"
command -v rg >/dev/null || fail "ripgrep is missing"

# Headers that came with Node.js spare the compilers a download.
if [ -f "$(dirname "$(dirname "$(readlink -f "$(command -v node)")")")/include/node/node.h" ]; then
  npm_config_nodedir=$(dirname "$(dirname "$(readlink -f "$(command -v node)")")")
  export npm_config_nodedir
fi
export npm_config_audit=false npm_config_fund=false npm_config_update_notifier=false

install_all() {
  cp "$here/package.json" "$here/package-lock.json" "$here/.npmrc" "$folder/"
  cd "$folder"
  # Without the packages' own scripts: some of them download from elsewhere. What must be compiled follows one by one.
  npm ci --ignore-scripts
  npm rebuild argon2 --foreground-scripts
  cd node_modules/code-server/lib/vscode
  # Its own lock misses one optional package, so this is no `npm ci`.
  npm install --omit=dev --ignore-scripts
  npm rebuild kerberos native-watchdog @vscode/spdlog @vscode/deviceid @parcel/watcher --foreground-scripts
  # Its last script asks for a tool that is not there; the module is built by then.
  npm rebuild node-pty --foreground-scripts || test -f node_modules/node-pty/build/Release/pty.node
  mkdir -p node_modules/@vscode/ripgrep/bin
  ln -sf "$(command -v rg)" node_modules/@vscode/ripgrep/bin/rg
  rm -rf node_modules.asar
  ln -s node_modules node_modules.asar
  ln -sf code-linux.sh bin/remote-cli/code-server
  ln -sf browser-linux.sh bin/helpers/browser.sh
}
# Where a command is tested, bash forgets `set -e` inside it; so nothing here stands before `||`.
trap 'echo "not installed (see $log)" >&2' ERR
set -E
echo "installing code-server into $folder"
install_all >>"$log" 2>&1
if ! tools_are_there; then
  echo "installing the client's tools"
  cd "$client"
  npm ci >>"$log" 2>&1
fi

printf '%s' "$wanted" >"$stamp"
echo "installed: $folder"
