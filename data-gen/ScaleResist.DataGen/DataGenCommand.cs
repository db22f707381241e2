// Options -> plan -> file. Invariant: a user's mistake gives one line with the mend and an exit code, never a stack trace.

using System.CommandLine;
using System.Diagnostics;
using System.Globalization;
using ScaleResist.DataGen.Files;
using ScaleResist.DataGen.Networks;
using ScaleResist.DataGen.Sample;

namespace ScaleResist.DataGen;

internal static class DataGenCommand
{
    private static readonly string[] FamilyNames = [.. Enum.GetValues<Family>().Select(FamilyPlan.NameOf)];

    /// <summary>Runs the command line; the tests come in here too.</summary>
    public static async Task<int> RunAsync(string[] args, TextWriter output, TextWriter error, CancellationToken cancel)
    {
        ParseResult parse = Build(output, error).Parse(args);
        if (parse.Errors.Count > 0)
            return Fail(error, ExitCodes.Usage, $"{parse.Errors[0].Message} See --help.");
        InvocationConfiguration configuration = new()
        {
            Output = output,
            Error = error,
            EnableDefaultExceptionHandler = false,
            // Time to delete what is unfinished: a row group or the streets of a large road network come in between.
            ProcessTerminationTimeout = TimeSpan.FromSeconds(60),
        };
        try
        {
            return await parse.InvokeAsync(configuration, cancel);
        }
        catch (OperationCanceledException)
        {
            return Fail(error, ExitCodes.Interrupted, "interrupted, and nothing was written; give the same command to start again");
        }
        catch (Exception fault) when (fault is IOException or UnauthorizedAccessException)
        {
            return Fail(error, ExitCodes.CannotWrite, $"cannot write: {fault.Message} Choose another --out or make room there.");
        }
    }

    private static RootCommand Build(TextWriter output, TextWriter error)
    {
        Argument<string?> family = new("family")
        {
            Description = $"One of {string.Join(", ", FamilyNames)}.",
            Arity = ArgumentArity.ZeroOrOne,
        };
        Option<long?> nodes = Count("--nodes", "Nodes, such as 5000, 1_000_000 or 1e6; rounded to what the family allows.");
        Option<long?> links = Count("--links", $"Links; only for {string.Join(", ", FamilyPlan.WithLinks.Select(FamilyPlan.NameOf))}.");
        Option<double> decades = new("--decades")
        {
            Description = "Spread of the conductances, log-uniform around 1; 0 makes all of them 1 and leaves the column out.",
            HelpName = "D",
        };
        Option<ulong> seed = new("--seed") { Description = "The same seed gives the same file.", HelpName = "S", DefaultValueFactory = _ => 1 };
        Option<string?> file = new("--out") { Description = $"The file to write: {LinkForm.Endings}.", HelpName = "FILE" };
        RootCommand root = new("Writes a seeded network as a file of links.") { family, nodes, links, decades, seed, file, SampleCommand(output, error) };
        root.SetAction((parse, cancel) =>
        {
            string? name = parse.GetValue(family);
            int index = Array.IndexOf(FamilyNames, name?.ToLowerInvariant());
            if (index < 0)
            {
                string problem = name is null ? "no family is given" : $"there is no family '{name}'";
                return Task.FromResult(Fail(error, ExitCodes.Usage, $"{problem}; choose one of {string.Join(", ", FamilyNames)}"));
            }
            if (parse.GetValue(nodes) is not long count)
                return Task.FromResult(Fail(error, ExitCodes.Usage, "--nodes is missing; say how many, as in --nodes 1e6"));
            if (parse.GetValue(file) is not string path)
                return Task.FromResult(Fail(error, ExitCodes.Usage, "--out is missing; name a file, as in --out network.tsv"));
            if (!LinkForm.TryOf(path, out LinkForm form))
                return Task.FromResult(Fail(error, ExitCodes.Usage, $"'{path}' tells no form; let --out end in {LinkForm.Endings}"));
            FamilyPlan plan = new((Family)index, count, parse.GetValue(links), parse.GetValue(seed), parse.GetValue(decades));
            if (!plan.TrySize(out _, out string? mistake))
                return Task.FromResult(Fail(error, ExitCodes.Usage, mistake!));
            return Task.Run(() => Generate(plan, form, path, output, cancel), CancellationToken.None);
        });
        return root;
    }

    private static Command SampleCommand(TextWriter output, TextWriter error)
    {
        Option<string?> folder = new("--out") { Description = "The folder to write into.", HelpName = "DIR" };
        Command sample = new("sample", "Writes the invented sample scenario: links, sites, pairs and planned works.") { folder };
        sample.SetAction((parse, cancel) =>
        {
            if (parse.GetValue(folder) is not string path)
                return Task.FromResult(Fail(error, ExitCodes.Usage, "--out is missing; name a folder, as in --out data-gen/samples"));
            return Task.Run(() => WriteSample(path, output, cancel), CancellationToken.None);
        });
        return sample;
    }

    private static int Generate(FamilyPlan plan, LinkForm form, string path, TextWriter output, CancellationToken cancel)
    {
        Stopwatch watch = Stopwatch.StartNew();
        WrittenFile written = LinkFile.Write(plan, form, path, cancel);
        string nodes = written.Nodes == written.IdRange ? $"{written.Nodes} nodes" : $"{written.Nodes} nodes with a link, ids below {written.IdRange}";
        output.WriteLine(string.Create(
            CultureInfo.InvariantCulture,
            $"{FamilyPlan.NameOf(plan.Family)}: {nodes}; {written.Links} links; {watch.Elapsed.TotalSeconds:F1} s; {written.Bytes} bytes in {path}"));
        return ExitCodes.Done;
    }

    private static int WriteSample(string folder, TextWriter output, CancellationToken cancel)
    {
        Directory.CreateDirectory(folder);
        Scenario scenario = Archipelago.Build();
        foreach ((string name, string content) in scenario.Files())
        {
            cancel.ThrowIfCancellationRequested();
            using PartialFile file = new(Path.Combine(folder, name));
            file.Stream.Write(System.Text.Encoding.UTF8.GetBytes(content));
            file.Commit();
        }
        output.WriteLine($"sample: {scenario.Sites.Count} sites; {scenario.Links.Count} rows of links; in {folder}");
        return ExitCodes.Done;
    }

    private static Option<long?> Count(string name, string description) => new(name)
    {
        Description = description,
        HelpName = name.TrimStart('-')[..1].ToUpperInvariant(),
        CustomParser = result =>
        {
            string text = result.Tokens[0].Value;
            if (decimal.TryParse(text.Replace("_", ""), NumberStyles.AllowExponent | NumberStyles.AllowDecimalPoint, CultureInfo.InvariantCulture, out decimal value)
                && value == decimal.Truncate(value) && value <= long.MaxValue)
                return (long)value;
            result.AddError($"{name} '{text}' is not a whole number; write it like 5000, 1_000_000 or 1e6.");
            return null;
        },
    };

    private static int Fail(TextWriter error, int code, string message)
    {
        error.WriteLine($"data-gen: {message.ReplaceLineEndings(" ")}");
        return code;
    }
}
