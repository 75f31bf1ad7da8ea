"""What comes from and goes to other files: schedules in, pictures and grids out."""
