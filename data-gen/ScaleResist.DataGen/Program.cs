// The command `data-gen`: seeded networks of any size, and the sample scenario.

using ScaleResist.DataGen;

return await DataGenCommand.RunAsync(args, Console.Out, Console.Error, CancellationToken.None);
