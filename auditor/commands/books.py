"""The command group ``rulebook``."""

import click


@click.group()
def rulebook() -> None:
    """List, read and test the rules.

    \b
    auditor rulebook list
    auditor rulebook show generator-trivial
    auditor rulebook test my-rules.yaml
    """


@rulebook.command("list")
def list_books() -> int:
    """List the shipped rulebooks and their rules."""
    from auditor.rule_pages import listing

    click.echo(listing(), nl=False)
    return 0


@rulebook.command("show")
@click.argument("names", nargs=-1)
@click.option("--html", type=click.Path(dir_okay=False), help="Write whole books as one page.")
def show_rule(names: tuple[str, ...], html: str | None) -> int:
    """Show a rule or a whole book, by its id or name.

    With --html the page holds the books named, shipped ones or files; without a name, all shipped.

    \b
    auditor rulebook show generator-trivial
    auditor rulebook show strength
    auditor rulebook show --html rules.html
    """
    from auditor.outputs import write_text
    from auditor.rule_pages import NoSuchRule, page, reference
    from auditor.rulebooks.rulebook import RulebookError

    if not names and not html:
        raise click.UsageError("name a rule or a book, or write the whole reference with --html")
    try:
        if html:
            write_text(html, reference(names))
        else:
            click.echo("\n".join(map(page, names)), nl=False)
    except (NoSuchRule, RulebookError) as error:
        raise click.ClickException(str(error)) from error
    return 0


@rulebook.command("test")
@click.argument("books", nargs=-1)
def test_books(books: tuple[str, ...]) -> int:
    """Load rulebooks and run the examples of their rules; all shipped ones by default.

    \b
    auditor rulebook test
    auditor rulebook test my-rules.yaml
    """
    from auditor.rule_pages import tested

    failures, summary = tested(books)
    for failure in failures:
        click.echo(failure)
    click.echo(summary)
    return 1 if failures else 0
