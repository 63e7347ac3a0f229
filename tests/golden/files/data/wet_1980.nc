not an archive; enough for jobs that are refused before it is opened
