"""One requirement to one assessment: result, verdict, standing, audit, reserve."""
