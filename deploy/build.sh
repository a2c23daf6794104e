# Sourced by the scripts beside it. $root is the checkout.

command -v dotnet >/dev/null || { echo "WearWatch needs the .NET 10 SDK: no 'dotnet' on the PATH." >&2; exit 3; }
export DOTNET_CLI_TELEMETRY_OPTOUT=1 DOTNET_NOLOGO=1

# built FOLDER NAME: path of the program built from a project folder.
built() { echo "$root/$1/bin/Release/net10.0/$2.dll"; }

# build_when_needed FOLDER NAME: builds the project if any source is newer than its program.
build_when_needed() {
  local program stamp
  program=$(built "$1" "$2")
  stamp="$root/$1/obj/.built"
  if [ -f "$program" ] && [ -f "$stamp" ] && [ -z "$(find "$root/services" "$root/proto" "$root/$1" "$root"/Directory.* \
      \( -name bin -o -name obj \) -prune -o -type f -newer "$stamp" -print -quit)" ]; then
    return
  fi
  echo "Building $1 ..." >&2
  local log
  log=$(mktemp)
  if ! dotnet build "$root/$1" -c Release --nologo -v quiet >"$log" 2>&1; then
    cat "$log" >&2
    rm -f "$log"
    echo "The build failed." >&2
    exit 3
  fi
  rm -f "$log"
  touch "$stamp"
}
