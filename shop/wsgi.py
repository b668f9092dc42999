"""What the web server loads."""

import os

from django.core.wsgi import get_wsgi_application

os.environ.setdefault("DJANGO_SETTINGS_MODULE", "shop.settings")
# Only the web server keeps a pool of PostgreSQL connections; workers and commands fork or end.
os.environ.setdefault("TAREBOOK_POOL", "yes")

application = get_wsgi_application()
