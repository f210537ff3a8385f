"""The working of a case, step by step, one module a part of it; :func:`lowpoint.survey.working.working` puts it
together.
"""
