# Shared by demo-data/run.sh and tests/run.sh (sourced, POSIX sh). Installs missing Debian packages and builds.

# install_packages PURPOSE…: installs what .ci/packages.txt lists for these purposes and the machine lacks; silent when nothing is missing.
install_packages() {
  missing=""
  for purpose in "$@"; do
    for package in $(sed -n "s/^$purpose //p" "$root/.ci/packages.txt"); do
      case "$(dpkg-query -W -f='${Status}' "$package" 2>/dev/null)" in
        "install ok installed") ;;
        *) missing="$missing $package" ;;
      esac
    done
  done
  [ -z "$missing" ] && return 0
  echo "Installing Debian packages:$missing"
  if [ "$(id -u)" = 0 ]; then
    as_root=""
  elif command -v sudo >/dev/null 2>&1; then
    as_root="sudo"
  else
    echo "error: packages are missing, and this is neither root nor a machine with sudo" >&2
    echo "fix:   as root, run: apt-get install$missing" >&2
    exit 1
  fi
  $as_root env DEBIAN_FRONTEND=noninteractive apt-get update -qq
  # shellcheck disable=SC2086
  $as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends $missing >/dev/null
}

# build PRESET [TARGET…]: configures when needed and builds into $build_root/PRESET, in no more than the lines that matter.
build() {
  preset=$1
  shift
  folder="$build_root/$preset"
  if [ ! -f "$folder/build.ninja" ]; then
    echo "Configuring ($preset) in $folder"
    cmake -S "$root" --preset "$preset" -B "$folder" -DFORMSIEVE_WARNINGS_ARE_ERRORS="${warnings_are_errors:-OFF}" >"$folder.configure.log" 2>&1 || {
      cat "$folder.configure.log" >&2
      exit 1
    }
  fi
  echo "Building ($preset)"
  if [ $# -gt 0 ]; then set -- --target "$@"; fi
  cmake --build "$folder" "$@" >"$folder.build.log" 2>&1 || {
    tail -n 60 "$folder.build.log" >&2
    echo "error: the build failed; the whole log is $folder.build.log" >&2
    exit 1
  }
}

build_root=${FORMSIEVE_BUILD:-$root/build}
mkdir -p "$build_root"
