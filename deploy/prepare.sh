# Sourced by deploy/run and deploy/test: installs what is missing, configures and builds.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

# install_missing FILE...: the packages listed in the files that are not there yet. Asks nothing.
install_missing() {
  local package missing=()
  while read -r package; do
    dpkg-query -W -f='${Status}' "$package" 2>/dev/null | grep -q 'ok installed' || missing+=("$package")
  done < <(sed -e 's/#.*//' -e '/^[[:space:]]*$/d' "$@")
  [ ${#missing[@]} -eq 0 ] && return
  local as_root=()
  [ "$(id -u)" -eq 0 ] || as_root=(sudo)
  echo "installing: ${missing[*]}" >&2
  "${as_root[@]}" apt-get update -qq
  "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "${missing[@]}" >/dev/null
}

# build_preset PRESET OPTION...: configures and builds one preset of CMakePresets.json.
build_preset() {
  local preset=$1
  shift
  cmake --preset "$preset" "$@" >"build-$preset.log" 2>&1 || { cat "build-$preset.log" >&2; return 1; }
  rm -f "build-$preset.log"
  cmake --build --preset "$preset"
}
