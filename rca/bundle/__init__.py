"""One archive that an auditor can check and rerun: BagIt bag, RO-Crate, detached signature."""
