"""The words of the program as frozen data. Nothing here reads, decides or prints."""
