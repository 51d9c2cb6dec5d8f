"""What is kept between runs, in files that people can read, commit and merge."""
