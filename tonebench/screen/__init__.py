"""The Textual application: charts, panels, keys and all wording of the screen."""
