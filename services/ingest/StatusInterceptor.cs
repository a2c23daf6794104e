using Google.Protobuf.WellKnownTypes;
using Google.Rpc;
using Grpc.Core;
using Grpc.Core.Interceptors;
using Microsoft.Extensions.Logging;
using Npgsql;

namespace WearWatch.Hosting;

/// <summary>The one place where errors become gRPC statuses; the three hosts compile this same file.</summary>
internal sealed partial class StatusInterceptor(ILogger<StatusInterceptor> log) : Interceptor
{
    public override async Task<TResponse> UnaryServerHandler<TRequest, TResponse>(
        TRequest request, ServerCallContext context, UnaryServerMethod<TRequest, TResponse> continuation)
    {
        try
        {
            return await continuation(request, context);
        }
        catch (Exception error) when (error is not RpcException)
        {
            throw Translate(error, context);
        }
    }

    public override async Task DuplexStreamingServerHandler<TRequest, TResponse>(
        IAsyncStreamReader<TRequest> requests, IServerStreamWriter<TResponse> responses, ServerCallContext context, DuplexStreamingServerMethod<TRequest, TResponse> continuation)
    {
        try
        {
            await continuation(requests, responses, context);
        }
        catch (Exception error) when (error is not RpcException)
        {
            throw Translate(error, context);
        }
    }

    private RpcException Translate(Exception error, ServerCallContext context) => error switch
    {
        RequestRefused refused => Refusal(refused),
        // A sender that went away: its time was up, it cancelled, or the connection broke (an IOException of the transport).
        _ when context.CancellationToken.IsCancellationRequested => Gone(context),
        OperationCanceledException or IOException => Gone(context),
        PostgresException { SqlState: PostgresErrorCodes.LockNotAvailable or PostgresErrorCodes.QueryCanceled } => Plain(StatusCode.DeadlineExceeded, "the database took too long; send again"),
        PostgresException { SqlState: PostgresErrorCodes.DeadlockDetected or PostgresErrorCodes.SerializationFailure } => Plain(StatusCode.Unavailable, "another sender was in the way; send again"),
        PostgresException { SqlState: PostgresErrorCodes.DiskFull } => Plain(StatusCode.Unavailable, "the database's disk is full; what was acknowledged is safe"),
        PostgresException { SqlState: PostgresErrorCodes.AdminShutdown or PostgresErrorCodes.CrashShutdown or PostgresErrorCodes.CannotConnectNow } => Away(),
        PostgresException known when !known.IsTransient => Unexpected(known),
        NpgsqlException { InnerException: TimeoutException } => Plain(StatusCode.DeadlineExceeded, "the database took too long; send again"),
        NpgsqlException => Away(),
        _ => Unexpected(error),
    };

    private static RpcException Away() => Plain(StatusCode.Unavailable, "the database is away; send again, what was acknowledged is safe");

    private static RpcException Gone(ServerCallContext context) =>
        context.Deadline <= DateTime.UtcNow ? Plain(StatusCode.DeadlineExceeded, "the time given was up") : Plain(StatusCode.Cancelled, "the caller went away");

    private static RpcException Refusal(RequestRefused refused)
    {
        var code = refused.Because switch
        {
            RefusedBecause.NotFound => Code.NotFound,
            RefusedBecause.AlreadyExists => Code.AlreadyExists,
            RefusedBecause.TooMuch => Code.ResourceExhausted,
            _ => Code.InvalidArgument,
        };
        var violation = new BadRequest { FieldViolations = { new BadRequest.Types.FieldViolation { Field = refused.Field, Description = refused.Message } } };
        return new Google.Rpc.Status { Code = (int)code, Message = refused.Message, Details = { Any.Pack(violation) } }.ToRpcException();
    }

    private RpcException Unexpected(Exception error)
    {
        var id = Guid.NewGuid();
        LogUnexpected(id, error);
        return Plain(StatusCode.Internal, $"unexpected error {id}; the log has the rest");
    }

    private static RpcException Plain(StatusCode code, string message) => new(new Grpc.Core.Status(code, message));

    [LoggerMessage(Level = LogLevel.Error, Message = "Unexpected error {Id}")]
    private partial void LogUnexpected(Guid id, Exception error);
}
