# Counts checks in a log: the closing line "N passed, N failed" of our own programs, Criterion's synthesis line, and for
# a test run by ctest that printed neither, ctest's own word. Prints "PASSED FAILED".
function of_test(line,   m) { return match(line, /^[0-9]+: /) ? substr(line, 1, RLENGTH - 2) : "" }
{
  id = of_test($0)
  text = $0
  sub(/^[0-9]+: /, "", text)
  gsub(/\033\[[0-9;]*m/, "", text)
}
text ~ /^[0-9]+ passed, [0-9]+ failed/ {
  split(text, w, /[ ,]+/)
  passed += w[1]; failed += w[3]; failures[id] += w[3]; counted[id] = 1
}
text ~ /Synthesis: Tested:/ {
  n = text; sub(/.*Passing: /, "", n); ok = n + 0
  n = text; sub(/.*Failing: /, "", n); bad = n + 0
  n = text; sub(/.*Crashing: /, "", n); bad += n + 0
  passed += ok; failed += bad; failures[id] += bad; counted[id] = 1
}
/ Test +#[0-9]+: / {
  n = $0; sub(/.*Test +#/, "", n); n = n + 0
  good = ($0 ~ /   Passed /)
  if (!counted[n] || (!good && !failures[n])) { if (good) passed++; else failed++ }
}
END { print passed + 0, failed + 0 }
