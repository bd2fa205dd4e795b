# Size and complexity of C files laid out by .clang-format: a function opens with "{" ending a line that starts in the
# first column and closes with "}" in the first column. Complexity: 1 + branches (if, for, while, case, &&, ||, ?).
# Prints one line a function: LINES COMPLEXITY FILE:LINE NAME.
FNR == 1 { head = ""; inside = 0 }
!inside && /^[a-zA-Z_].*\(/ { head = $0; start = FNR }
!inside && /^[a-zA-Z_ ].*\{$/ && head != "" && !/^(struct|enum|union|typedef)/ && !/=/ {
  inside = 1; branches = 1; body = 0
  name = head; sub(/\(.*/, "", name); sub(/.*[ *]/, "", name)
  next
}
!inside && /;[ \t]*(\/\*.*)?$/ { head = "" }
inside && /^}/ { print FNR - start + 1, branches, FILENAME ":" start, name; inside = 0; head = ""; next }
inside {
  text = $0
  gsub(/"([^"\\]|\\.)*"/, "", text); gsub(/\/\*.*\*\//, "", text)
  branches += gsub(/(^|[^a-z_])(if|for|while|case)[ (]/, "", text) + gsub(/&&|\|\||\?/, "", text)
}
