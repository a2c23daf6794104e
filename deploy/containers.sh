# Sourced by deploy/test: a container engine for Testcontainers where there is none, on a machine that may install one.
# Sets DOCKER_HOST and WEARWATCH_POSTGRES_IMAGE. Without a registry the image is made of this machine's own PostgreSQL.

engine_answers() {
  local socket=${DOCKER_HOST:-unix:///var/run/docker.sock}
  [ -S "${socket#unix://}" ] && curl -sf --max-time 5 --unix-socket "${socket#unix://}" http://engine/_ping >/dev/null
}

start_engine() {
  if engine_answers; then return 0; fi
  if ! command -v podman >/dev/null || ! command -v runc >/dev/null || ! command -v curl >/dev/null; then
    [ "$(id -u)" = 0 ] && command -v apt-get >/dev/null || return 1
    apt-get update -qq >/dev/null && apt-get install -y -qq --no-install-recommends podman runc curl >/dev/null || return 1
  fi
  ENGINE_FOLDER=$(mktemp -d)
  cat >"$ENGINE_FOLDER/containers.conf" <<CONF
[containers]
default_ulimits = ["nofile=4096:4096", "nproc=4096:4096"]
[engine]
runtime = "runc"
cgroup_manager = "cgroupfs"
events_logger = "file"
CONF
  export CONTAINERS_CONF=$ENGINE_FOLDER/containers.conf DOCKER_HOST=unix://$ENGINE_FOLDER/engine.sock TESTCONTAINERS_RYUK_DISABLED=true
  podman system service --time=0 "$DOCKER_HOST" >"$ENGINE_FOLDER/engine.log" 2>&1 &
  ENGINE_PID=$!
  for _ in $(seq 50); do engine_answers && break; sleep 0.2; done
  engine_answers && own_image
}

# An image of this machine's PostgreSQL: its programs, their libraries, a shell and the few tools of the entry point.
own_image() {
  export WEARWATCH_POSTGRES_IMAGE=localhost/wearwatch-postgres:15
  local server tree
  server=$(ls -d /usr/lib/postgresql/*/ | tail -n 1)
  [ -n "$server" ] || return 1
  tree=$(mktemp -d)
  mkdir -p "$tree"/{usr/local/bin,usr/bin,bin,etc,tmp,var/lib/postgresql/data,run/postgresql,dev,proc,sys}
  ln -s ../run "$tree/var/run"
  chmod 1777 "$tree/tmp"
  cp -a --parents "${server%/}" "/usr/share/postgresql/$(basename "$server")" /usr/share/zoneinfo "$tree" 2>/dev/null || true
  cp -a --parents /usr/lib/locale/C.utf8 "$tree" 2>/dev/null || true
  local tools=(/bin/bash /bin/cat /bin/chown /bin/chmod /bin/mkdir /bin/rm /bin/ls /usr/bin/id /usr/bin/env /bin/sleep /usr/bin/setpriv)
  local file library
  for file in "${tools[@]}"; do cp -L "$file" "$tree/usr/bin/"; done
  cp -L /bin/bash "$tree/bin/bash"; ln -sf bash "$tree/bin/sh"
  for file in "${tools[@]}" "${server}"bin/* "${server}"lib/*.so; do
    ldd "$file" 2>/dev/null | grep -o '/[^ ]*' || true
  done | sort -u | while read -r library; do
    mkdir -p "$tree$(dirname "$library")"
    cp -L "$library" "$tree$library"
  done
  rm -rf "$tree${server}lib/bitcode"
  printf 'root:x:0:0:root:/root:/bin/bash\npostgres:x:999:999::/var/lib/postgresql:/bin/bash\n' >"$tree/etc/passwd"
  rm -rf "$tree${server}lib/bitcode"
  printf 'root:x:0:\npostgres:x:999:\n' >"$tree/etc/group"
  cat >"$tree/usr/local/bin/entry" <<ENTRY
#!/bin/bash
# POSTGRES_USER, POSTGRES_PASSWORD and POSTGRES_DB as the usual image takes them; arguments go to the server.
set -e
export PATH=${server}bin:/usr/bin:/bin HOME=/var/lib/postgresql
data=/var/lib/postgresql/data user=\${POSTGRES_USER:-postgres}
chown -R postgres:postgres /var/lib/postgresql /run/postgresql
as() { setpriv --reuid=postgres --regid=postgres --clear-groups "\$@"; }
echo "\${POSTGRES_PASSWORD:-postgres}" >/tmp/pw; chown postgres /tmp/pw
as initdb -D \$data -U "\$user" --pwfile=/tmp/pw --auth-local=trust --auth-host=scram-sha-256 -E UTF8 --locale=C.UTF-8 --no-sync >/dev/null
echo "host all all all scram-sha-256" >>\$data/pg_hba.conf
as pg_ctl -D \$data -w -l /tmp/first.log -o "-c listen_addresses=''" start >/dev/null
[ "\${POSTGRES_DB:-\$user}" = postgres ] || as psql -U "\$user" -d postgres -qc "create database \"\${POSTGRES_DB:-\$user}\""
as pg_ctl -D \$data -m fast -w stop >/dev/null
[ "\$1" = postgres ] && shift
exec setpriv --reuid=postgres --regid=postgres --clear-groups postgres -D \$data -c listen_addresses='*' "\$@"
ENTRY
  chmod +x "$tree/usr/local/bin/entry"
  find "$tree" -type d ! -perm -0055 -exec chmod a+rx {} +
  tar -C "$tree" -c . | podman import --change 'ENTRYPOINT ["/usr/local/bin/entry"]' --change "ENV PATH=${server}bin:/usr/local/bin:/usr/bin:/bin" \
    --change 'EXPOSE 5432' - "$WEARWATCH_POSTGRES_IMAGE" >/dev/null || { rm -rf "$tree"; return 1; }
  rm -rf "$tree"
}

stop_engine() {
  [ -z "${ENGINE_PID:-}" ] && return
  podman rm -af >/dev/null 2>&1 || true
  kill "$ENGINE_PID" 2>/dev/null || true
  rm -rf "$ENGINE_FOLDER"
}
