"""What an auditor's rerun gave against what was issued: classes, reasons, the rerun report."""
