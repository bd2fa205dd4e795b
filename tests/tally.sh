# shellcheck shell=sh
# Sourced by the test scripts: counts checks and tells them.
#   check NAME COMMAND...   passes if the command succeeds; its output is shown only when it fails
#   tally                   prints "N passed, N failed" and returns 1 if any failed
passed=0
failed=0
tally_log=$(mktemp)
trap 'rm -f "$tally_log"' EXIT

check() {
  check_name=$1
  shift
  if "$@" >"$tally_log" 2>&1; then
    passed=$((passed + 1))
    echo "ok    $check_name"
  else
    failed=$((failed + 1))
    echo "FAIL  $check_name"
    sed 's/^/        /' "$tally_log" | tail -40
  fi
}

tally() {
  echo "$passed passed, $failed failed"
  [ "$failed" -eq 0 ]
}
