import { downloadCommands } from './by-hand'
import { AGENT_PORT, type Command, codeOf, FILE_NAME, type JoiningInput, wrapped } from './types'

export function containerCommands(input: JoiningInput): Command[] {
  return [
    ...downloadCommands(input),
    { id: 'containerfile', label: 'Containerfile', text: containerfile(input) },
    { id: 'build', label: 'Build', text: 'podman build -t thinspan-agent .' },
    {
      id: 'container-run',
      label: 'Run; the volume keeps the key',
      text: wrapped([
        'podman run -d --name thinspan-agent --restart on-failure --network host',
        '--read-only --cap-drop all --security-opt no-new-privileges',
        '--memory 256m --cpus 0.2 --pids-limit 64',
        '-v thinspan-agent:/state',
        `-e THINSPAN_COLLECTOR=${input.origin}`,
        `-e THINSPAN_CODE=${codeOf(input)}`,
        '-e THINSPAN_NAME=NAME',
        `-e THINSPAN_LISTEN=0.0.0.0:${AGENT_PORT}`,
        `-e THINSPAN_ADDRESS=ws://HOST:${AGENT_PORT}`,
        `-e THINSPAN_NEIGHBOURS=ws://PEER:${AGENT_PORT}`,
        'thinspan-agent',
      ]),
    },
  ]
}

/** The sum is checked again as the image is made: what was downloaded is what runs. */
export function containerfile({ file }: JoiningInput): string {
  const verify = file ? `RUN echo '${file.sha256}  /opt/${FILE_NAME}' | sha256sum -c\n` : ''
  return `FROM docker.io/library/node:20-slim
COPY ${FILE_NAME} /opt/${FILE_NAME}
${verify}RUN mkdir -m 0700 /state && chown 65532:65532 /state
USER 65532:65532
VOLUME /state
ENV THINSPAN_CONFIG=/state/agent.json
ENTRYPOINT ["node", "/opt/${FILE_NAME}"]
CMD ["run", "--enrol-if-needed"]`
}

/** Node.js in a folder of its own, for machines that have none and no containers. */
export function ownNodeCommands({ nodeVersion }: JoiningInput): Command[] {
  const name = `node-v${nodeVersion}-linux-x64`
  const base = `https://nodejs.org/dist/v${nodeVersion}`
  return [
    {
      id: 'own-node',
      label: 'Node.js beside the agent',
      text: [
        `curl -fsSO ${base}/${name}.tar.gz`,
        `curl -fsS ${base}/SHASUMS256.txt | grep ' ${name}.tar.gz$' | sha256sum -c`,
        'sudo mkdir -p /opt/thinspan/node',
        `sudo tar -xzf ${name}.tar.gz -C /opt/thinspan/node --strip-components 1`,
        '/opt/thinspan/node/bin/node --version',
      ].join('\n'),
    },
  ]
}
