"""The scripts here are run, not imported: they set the number of threads for their process."""

collect_ignore_glob = ["[!t]*.py"]
