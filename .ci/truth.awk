# awk -f truth.awk results.csv truth.csv: fails unless every shot of a simulated night is
# there and near what was drawn: N within 3 %, the fraction within 0.02, T within 5 % and mu
# within 2 %, or each within four of its statistical errors.
BEGIN { FS = "," }
FNR == 1 { for (i = 1; i <= NF; i++) at[FILENAME, $i] = i; next }
FILENAME == ARGV[1] { for (i = 1; i <= NF; i++) cell[$1, i] = $i; next }
{
	shots++
	near("atoms", drawn("N"), 0.03 * drawn("N"))
	near("fraction", drawn("fraction"), 0.02)
	near("T_nK", drawn("T_nK"), 0.05 * drawn("T_nK"))
	if (drawn("mu_nK") != "") near("mu_nK", drawn("mu_nK"), 0.02 * drawn("mu_nK"))
}
END {
	if (shots < 9) print "only " shots + 0 " shots in the truth"
	if (shots < 9 || wrong) exit 1
	print shots " shots are near what was drawn"
}

function drawn(column) { return $at[FILENAME, column] }
function found(column) { return cell[$1, at[ARGV[1], column]] }

function near(column, truth, tolerance,    value, errors) {
	value = found(column)
	errors = 4 * found(column "_err")
	if (errors > tolerance) tolerance = errors
	if (value - truth <= tolerance && truth - value <= tolerance && found("status") == "ok") return
	printf "%s: %s is %s, was drawn as %s\n", $1, column, value, truth
	wrong = 1
}
