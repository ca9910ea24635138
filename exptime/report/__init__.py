"""Result records made readable: text, HTML, JSON and figures."""
