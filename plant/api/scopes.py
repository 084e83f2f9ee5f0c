"""What a token may be allowed. A token has one or more of these and never anything else."""

READINGS_WRITE = "readings.write"
COMPARISON_READ = "comparison.read"
DEVIATIONS_READ = "deviations.read"
REPORTS_READ = "reports.read"

SCOPES: dict[str, str] = {
    READINGS_WRITE: "send readings",
    COMPARISON_READ: "read doses used, designed and needed",
    DEVIATIONS_READ: "read deviations",
    REPORTS_READ: "read issued reports",
}
