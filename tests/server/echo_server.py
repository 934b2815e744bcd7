"""A server that returns what it gets, and nothing else: the measure of what a call costs by itself. Prints its port."""

import asyncio

import grpc


async def echo(request: bytes, context) -> bytes:
    return request


async def serve() -> None:
    server = grpc.aio.server(options=[("grpc.so_reuseport", 0)])
    handlers = {"Echo": grpc.unary_unary_rpc_method_handler(echo)}
    server.add_generic_rpc_handlers([grpc.method_handlers_generic_handler("bare.Echo", handlers)])
    port = server.add_insecure_port("127.0.0.1:0")
    await server.start()
    print(port, flush=True)
    await server.wait_for_termination()


if __name__ == "__main__":
    asyncio.run(serve())
