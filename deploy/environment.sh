# Sourced by demo.sh and test.sh: one virtual environment, made once and renewed when pyproject.toml changes.

# Prints the newest working Python of at least 3.11 on PATH; says what to install when there is none.
find_python() {
  local name
  for name in python3.14 python3.13 python3.12 python3.11 python3; do
    if "$name" -c 'import sys, venv, ensurepip; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1; then
      command -v "$name"
      return
    fi
  done
  echo "interwind needs Python 3.11 or newer, with its venv module, on PATH; none was found." >&2
  echo "Install it from your system's packages (on Debian and Ubuntu: apt-get install python3 python3-venv), then run this again." >&2
  return 1
}

# stage NAME: prints one line, with the seconds since the script began.
stage() { printf '[%4d s] %s\n' "$SECONDS" "$*"; }

# environment FOLDER EXTRAS [PIN...]: makes FOLDER and installs the project there, unless it holds at least these extras.
environment() {
  local folder=$1 extras=$2 wanted python
  shift 2
  wanted="$* $(cksum <pyproject.toml)"
  case "$(cat "$folder/installed" 2>/dev/null)" in
    "$extras"*" $wanted") if "$folder/bin/python" -c 'import interwind' 2>/dev/null; then return; fi ;;
  esac
  python=$(find_python)
  stage "installing interwind[$extras] $* into $folder with $("$python" --version)"
  if ! "$folder/bin/python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' 2>/dev/null; then
    rm -rf "$folder"
    "$python" -m venv "$folder"
  fi
  "$folder/bin/python" -m pip install --quiet --disable-pip-version-check --editable ".[$extras]" "$@"
  echo "$extras $wanted" >"$folder/installed"
}

# One BLAS thread a process: several together are slower on a shared machine.
export OPENBLAS_NUM_THREADS=1 OMP_NUM_THREADS=1 MKL_NUM_THREADS=1
